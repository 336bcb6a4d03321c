"""A large predicate from a netlist file to a proved circuit: which blocks have a given first digest word.

SHA-256 (FIPS 180-4) with one block and the fixed initial value: 512 input bits. The word asked for is that of
a message by the standard library's `hashlib`, so that the predicate is satisfiable.
"""

from __future__ import annotations

import hashlib
from pathlib import Path

import pytest

import revsynth
from revsynth.qasm import read
from tests.bristol_text import bristol_text
from tests.elaborate.test_sha256 import block_bits
from tests.synthesis.wide_networks import sha256_first_word_is

MESSAGE = b"lamp code of the north beacon"


def hash_spec(folder: Path, rounds: int) -> Path:
    """The predicate as a Bristol Fashion file."""
    first = int.from_bytes(hashlib.sha256(MESSAGE).digest()[:4], "big")
    path = folder / "hash.bristol"
    path.write_text(bristol_text(sha256_first_word_is(first, rounds), [32] * 16))
    return path


def test_the_file_is_the_predicate_of_the_standard(tmp_path: Path) -> None:
    """1 at the message, 0 beside it."""
    spec = revsynth.read_spec(hash_spec(tmp_path, 64))
    bits = block_bits(MESSAGE)
    netlist = spec.body.netlist
    for flipped in (None, 0, 300, 511):
        values = [0, *bits]
        if flipped is not None:
            values[1 + flipped] ^= 1
        for gate in netlist.gates:
            one, other = (values[operand >> 1] ^ (operand & 1) for operand in gate.operands)
            values.append(one ^ other if gate.kind == "xor" else one & other)
        (output,) = netlist.outputs
        assert values[output >> 1] ^ (output & 1) == (flipped is None)


@pytest.mark.quality
@pytest.mark.slow
@pytest.mark.parametrize(
    ("budget", "t", "qubits", "gates"), [(None, 86_724, 33_283, 563_100), (8_600, 155_472, 8_600, 1_567_000)]
)
def test_a_hash_predicate_is_built_and_proved(
    budget: int | None, t: int, qubits: int, gates: int, tmp_path: Path
) -> None:
    """Asked for: 87,012 T at about 47,000 qubits, and at most 170,000 T within 8,600 qubits."""
    spec = revsynth.read_spec(hash_spec(tmp_path, 64))
    built = revsynth.build(spec, method="network", uncompute="measured", qubits=budget)
    assert built.evidence.level == "proved"
    assert built.cost["t"] <= t
    assert built.cost["qubits"] <= qubits
    assert built.cost["gates"] <= gates
    assert built.cost["measured"] == built.cost["ands"] - 1
    assert read(built.text()).circuit.qubits == built.cost["qubits"]
