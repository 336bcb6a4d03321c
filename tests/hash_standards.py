"""Hashes around a nonlinear layer that is given: SHA3-256 (FIPS 202) and Ascon-Hash256 (NIST SP 800-232).

Sections of FIPS 202: 3.2, 3.3, 5 and 6.1.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

Plane = np.ndarray
"""Five lanes of 64 bits, (5,) uint64; or rows of them, (5, rows)."""

LANE = (1 << 64) - 1
RATE = 136


def rotated(lane: int, by: int) -> int:
    """A lane rotated to the left."""
    by %= 64
    return (lane << by | lane >> 64 - by) & LANE


def round_constants() -> list[int]:
    """The constants of the 24 rounds from the shift register of section 3.2.5."""
    state, constants = 1, []
    bits = []
    for _ in range(255):
        bits.append(state & 1)
        state = state << 1 ^ (0x171 if state >> 7 else 0)
    for number in range(24):
        constants.append(sum(bits[(j + 7 * number) % 255] << (2**j - 1) for j in range(7)))
    return constants


def offsets() -> dict[tuple[int, int], int]:
    """The rotation of every lane (x, y), section 3.2.2."""
    found = {(0, 0): 0}
    x, y = 1, 0
    for t in range(24):
        found[x, y] = (t + 1) * (t + 2) // 2
        x, y = y, (2 * x + 3 * y) % 5
    return found


def permuted(state: list[int], chi: Callable[[Plane], Plane]) -> list[int]:
    """The state, lane x + 5 y, after 24 rounds; chi maps (5, 5) lanes, row x and column y."""
    shifts = offsets()
    for constant in round_constants():
        parity = [state[x] ^ state[x + 5] ^ state[x + 10] ^ state[x + 15] ^ state[x + 20] for x in range(5)]
        effect = [parity[(x - 1) % 5] ^ rotated(parity[(x + 1) % 5], 1) for x in range(5)]
        moved = np.zeros((5, 5), dtype=np.uint64)
        for x in range(5):
            for y in range(5):
                moved[y, (2 * x + 3 * y) % 5] = rotated(state[x + 5 * y] ^ effect[x], shifts[x, y])
        after = chi(moved)
        state = [int(after[x, y]) for y in range(5) for x in range(5)]
        state[0] ^= constant
    return state


def sha3_256(message: bytes, chi: Callable[[Plane], Plane]) -> bytes:
    """The hash value of a message."""
    padded = bytearray(message + b"\x06" + bytes(-(len(message) + 1) % RATE))
    padded[-1] |= 0x80
    state = [0] * 25
    for begin in range(0, len(padded), RATE):
        for lane in range(RATE // 8):
            state[lane] ^= int.from_bytes(padded[begin + 8 * lane : begin + 8 * lane + 8], "little")
        state = permuted(state, chi)
    return b"".join(lane.to_bytes(8, "little") for lane in state[:4])


def ascon_permuted(state: list[int], rounds: int, substitution: Callable[[Plane], Plane]) -> list[int]:
    """The five words after the last rounds of Ascon's permutation (NIST SP 800-232, section 3)."""
    turns = ((19, 28), (61, 39), (1, 6), (10, 17), (7, 41))
    for number in range(12 - rounds, 12):
        state[2] ^= 0xF0 - 0x10 * number + number
        words = [int(word) for word in substitution(np.array(state, dtype=np.uint64))]
        state = [
            word ^ rotated(word, 64 - one) ^ rotated(word, 64 - other)
            for word, (one, other) in zip(words, turns, strict=True)
        ]
    return state


def ascon_hash256(message: bytes, substitution: Callable[[Plane], Plane]) -> bytes:
    """Ascon-Hash256 of a message (NIST SP 800-232, section 5.1)."""
    state = ascon_permuted([0x0000080100CC0002, 0, 0, 0, 0], 12, substitution)
    padded = message + b"\x01" + bytes(-(len(message) + 1) % 8)
    for begin in range(0, len(padded), 8):
        state[0] ^= int.from_bytes(padded[begin : begin + 8], "little")
        state = ascon_permuted(state, 12, substitution)
    digest = b""
    while len(digest) < 32:
        if digest:
            state = ascon_permuted(state, 12, substitution)
        digest += state[0].to_bytes(8, "little")
    return digest
