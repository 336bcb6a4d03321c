"""One block of SHA-256 through the word operations of elaboration, against hashlib (FIPS 180-4)."""

from __future__ import annotations

import hashlib
import random

import numpy as np
import pytest

from revsynth.logic.network import Network
from revsynth.logic.network_simulation import simulate
from tests.sha256_network import INITIAL, ROUND_CONSTANTS, build, build_naive

MESSAGES = [b"abc", b"", *(random.Random(7).randbytes(length) for length in range(40, 56)), b"\xff" * 55]
"""Short enough for one block; the first is the example of FIPS 180-4."""


def padded(message: bytes) -> bytes:
    """The block of a message of at most 55 bytes (FIPS 180-4, section 5.1.1)."""
    return message + b"\x80" + b"\0" * (55 - len(message)) + (8 * len(message)).to_bytes(8, "big")


def block_bits(message: bytes) -> list[int]:
    """The inputs of the network."""
    block = padded(message)
    words = [int.from_bytes(block[at : at + 4], "big") for at in range(0, 64, 4)]
    return [word >> bit & 1 for word in words for bit in range(32)]


def digests(network: Network, messages: list[bytes]) -> list[bytes]:
    """The hash values of at most 64 messages."""
    inputs = np.zeros((512, 1), dtype=np.uint64)
    for sample, message in enumerate(messages):
        for place, bit in enumerate(block_bits(message)):
            inputs[place, 0] |= np.uint64(bit << sample)
    outputs = [int(word) for word in simulate(network, inputs)[:, 0]]
    found = []
    for sample in range(len(messages)):
        bits = [word >> sample & 1 for word in outputs]
        words = [sum(bits[32 * at + bit] << bit for bit in range(32)) for at in range(8)]
        found.append(b"".join(word.to_bytes(4, "big") for word in words))
    return found


@pytest.fixture(scope="module")
def network() -> Network:
    return build()


def test_constants_are_those_of_the_standard() -> None:
    assert (ROUND_CONSTANTS[0], ROUND_CONSTANTS[63]) == (0x428A2F98, 0xC67178F2)
    assert (INITIAL[0], INITIAL[7]) == (0x6A09E667, 0x5BE0CD19)


def test_digests_are_those_of_hashlib(network: Network) -> None:
    assert digests(network, MESSAGES) == [hashlib.sha256(message).digest() for message in MESSAGES]


@pytest.mark.quality
def test_fewer_ands_than_published(network: Network) -> None:
    """The best published network for the fixed initial value has 22,385 ANDs (figure from memory)."""
    assert network.ands <= 21_890
    assert network.xors <= 88_745


@pytest.mark.slow
def test_naive_network_does_the_same() -> None:
    naive = build_naive()
    assert digests(naive, MESSAGES) == [hashlib.sha256(message).digest() for message in MESSAGES]
    assert 230_000 < naive.ands < 250_000
