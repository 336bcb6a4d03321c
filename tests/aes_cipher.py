"""AES-128 encryption of one block (FIPS 197, sections 5.1 and 5.2) around a substitution that is given."""

from __future__ import annotations

from collections.abc import Callable

Substitution = Callable[[bytes], bytes]


def doubled(value: int) -> int:
    """A byte times x modulo x^8 + x^4 + x^3 + x + 1."""
    return value << 1 ^ (0x11B if value >> 7 else 0)


def round_keys(key: bytes, substitution: Substitution) -> list[bytes]:
    """The eleven round keys of a key of 16 bytes."""
    words = [key[at : at + 4] for at in range(0, 16, 4)]
    constant = 1
    while len(words) < 44:
        last = words[-1]
        if len(words) % 4 == 0:
            last = substitution(last[1:] + last[:1])
            last = bytes([last[0] ^ constant]) + last[1:]
            constant = doubled(constant)
        words.append(bytes(x ^ y for x, y in zip(words[-4], last, strict=True)))
    return [b"".join(words[at : at + 4]) for at in range(0, 44, 4)]


def encrypted(key: bytes, block: bytes, substitution: Substitution) -> bytes:
    """One block of 16 bytes, column by column."""
    first, *middle, last = round_keys(key, substitution)
    state = bytes(x ^ y for x, y in zip(block, first, strict=True))
    for number, round_key in enumerate([*middle, last]):
        state = substitution(state)
        state = bytes(state[(5 * at) % 16] for at in range(16))
        if number < 9:
            state = b"".join(_mixed(state[at : at + 4]) for at in range(0, 16, 4))
        state = bytes(x ^ y for x, y in zip(state, round_key, strict=True))
    return state


def _mixed(column: bytes) -> bytes:
    every = column[0] ^ column[1] ^ column[2] ^ column[3]
    return bytes(column[i] ^ every ^ doubled(column[i] ^ column[(i + 1) % 4]) for i in range(4))
