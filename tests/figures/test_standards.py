"""Nonlinear layers of published standards, put together by us, inside the standard's own algorithm."""

from __future__ import annotations

import hashlib
import re
from collections.abc import Callable
from functools import cache

import numpy as np
import pytest

import revsynth
from revsynth.elaborate import elaborate
from revsynth.logic.network import Network
from revsynth.logic.network_simulation import simulate
from revsynth.spec.model import Spec
from tests.aes_cipher import encrypted
from tests.elaborate.test_sha256 import digests
from tests.hash_standards import ascon_hash256, sha3_256
from tests.naive_networks import aes_sbox
from tests.public_data import vector_file
from tests.sha256_network import build as sha256
from tests.slow_simulator import run_cascade


def layer(values: dict[str, str], bits: int) -> Spec:
    """Five words x0 ... x4 to five words y0 ... y4, bit by bit."""
    return revsynth.outputs(
        {name: {"value": value, "bits": bits} for name, value in values.items()},
        inputs={f"x{i}": bits for i in range(5)},
    )


def chi(bits: int) -> Spec:
    """The step chi of FIPS 202, section 3.2.4, on one plane."""
    return layer({f"y{i}": f"x{i} ^ (~x{(i + 1) % 5} & x{(i + 2) % 5})" for i in range(5)}, bits)


def ascon(bits: int) -> Spec:
    """Ascon's substitution (NIST SP 800-232, section 3.3) as its words are combined, each written out."""
    x = ["(x0 ^ x4)", "x1", "(x2 ^ x1)", "x3", "(x4 ^ x3)"]
    y = [f"({x[i]} ^ (~{x[(i + 1) % 5]} & {x[(i + 2) % 5]}))" for i in range(5)]
    after = [f"{y[0]} ^ {y[4]}", f"{y[1]} ^ {y[0]}", f"~{y[2]}", f"{y[3]} ^ {y[2]}", y[4]]
    return layer({f"y{i}": text for i, text in enumerate(after)}, bits)


LAYERS = {"chi of Keccak": chi, "substitution of Ascon": ascon}


def network_of(spec: Spec) -> Network:
    return elaborate(spec).function.values


def on_lanes(network: Network) -> Callable[[np.ndarray], np.ndarray]:
    """A network of five one-bit words on lanes of 64 bits, which are 64 samples each."""
    return lambda lanes: simulate(network, lanes.reshape(5, -1)).reshape(lanes.shape)


@pytest.mark.quality
@pytest.mark.parametrize("name", LAYERS)
@pytest.mark.parametrize("bits", [1, 64])
def test_five_ands_a_column(name: str, bits: int) -> None:
    assert network_of(LAYERS[name](bits)).ands == 5 * bits


@pytest.mark.quality
@pytest.mark.parametrize("name", LAYERS)
def test_five_ands_a_column_in_the_circuit(name: str) -> None:
    """80 input bits, onto fresh outputs."""
    built = revsynth.build(LAYERS[name](16), oracle="fresh", uncompute="measured")
    assert built.evidence.level == "proved"
    assert (built.cost["ands"], built.cost["t"]) == (80, 320)


@pytest.mark.parametrize("message", [b"", b"abc", b"tide", bytes(range(256))])
def test_sha3_with_our_chi(message: bytes) -> None:
    """Against the standard library (FIPS 202)."""
    assert sha3_256(message, on_lanes(network_of(chi(1)))) == hashlib.sha3_256(message).digest()


def test_ascon_hash_with_our_substitution() -> None:
    """The hash of nothing, as in the test vectors of NIST SP 800-232 (from memory; a hash cannot be right by
    chance)."""
    wanted = "0b3be5850f2f6b98caf29f8fdea89b64a1fa70aa249b8f839bd53baa304d92b2"
    assert ascon_hash256(b"", on_lanes(network_of(ascon(1)))).hex() == wanted


def test_aes_with_the_cascade_from_the_bare_table() -> None:
    """The example of FIPS 197, appendix B."""
    key, block = "2b7e151628aed2a6abf7158809cf4f3c", "3243f6a8885a308d313198a2e0370734"
    wanted = "3925841d02dc09fbdc118597196a0b32"
    found = encrypted(bytes.fromhex(key), bytes.fromhex(block), substitution())
    assert found.hex() == wanted


@cache
def substitution() -> Callable[[bytes], bytes]:
    """AES's substitution as the built cascade does it, one byte after the other."""
    spec = revsynth.outputs({"y": {"table": aes_sbox(), "bits": 8}}, inputs={"x": 8})
    cascade = revsynth.build(spec, method="network", gates="toffoli", uncompute="measured").cascade
    after = [run_cascade(cascade, value) for value in range(256)]
    assert all(state & 255 == value and state >> 16 == 0 for value, (state, _) in enumerate(after))
    return lambda data: bytes(after[value][0] >> 8 & 255 for value in data)


@pytest.mark.slow
@pytest.mark.public
@pytest.mark.parametrize("name", ["GFSbox", "KeySbox", "VarKey", "VarTxt"])
def test_nist_vectors_of_aes(name: str) -> None:
    """NIST's known answers for ECB with keys of 128 bits, encryption (package cryptography-vectors)."""
    text = vector_file(f"ciphers/AES/ECB/ECB{name}128.rsp").partition("[DECRYPT]")[0]
    cases = re.findall(r"KEY = (\w+)\s+PLAINTEXT = (\w+)\s+CIPHERTEXT = (\w+)", text)
    assert len(cases) >= 7
    substitute = substitution()
    for key, block, wanted in cases:
        assert encrypted(bytes.fromhex(key), bytes.fromhex(block), substitute).hex() == wanted


@pytest.mark.slow
@pytest.mark.public
def test_nist_vectors_of_sha256() -> None:
    """NIST's vectors of whole bytes that fit one block (package cryptography-vectors)."""
    text = vector_file("hashes/SHA2/SHA256ShortMsg.rsp")
    cases = re.findall(r"Len = (\d+)\s+Msg = (\w+)\s+MD = (\w+)", text)
    fitting = [
        (bytes.fromhex(message)[: int(bits) // 8], md) for bits, message, md in cases if int(bits) <= 440
    ]
    assert len(fitting) == 56
    found = digests(sha256(), [message for message, _ in fitting])
    assert [digest.hex() for digest in found] == [md for _, md in fitting]
