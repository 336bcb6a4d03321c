"""The fewest ANDs of any function of at most five inputs, and a circuit that has no more.

Two functions are in one affine class where an affine change of the inputs and an affine function added turn
one into the other; both need equally many ANDs. There are 8 classes for four inputs and 48 for five, with
0 to 4 ANDs. The spectra tell the class: the sum of the absolute Walsh coefficients and the sum of the cubed
absolute autocorrelations together have 48 different values on the 48 classes. The map onto the class's own
function is found by meeting in the middle: random affine images of both are compared.

Sources: M. S. Turan, R. Peralta, "The multiplicative complexity of Boolean functions on four and five
variables", LightSec 2014; the invariants are those of B. Preneel et al., "Propagation characteristics of
Boolean functions", Eurocrypt 1990 (from memory). `affine_class_search` finds the classes and circuits anew.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache, lru_cache

import numpy as np
from numpy.typing import NDArray

from revsynth.logic.network import Network
from revsynth.logic.product_chain import ProductChain, Sum, mapped, substituted, to_network
from revsynth.logic.random_words import Random

MOST_INPUTS = 5
Tables = NDArray[np.uint32]
"""Bit x of a table is the value at input x."""

_CHUNK = 8192
_IMAGES = {4: 1024, 5: 8192}
"""How many random affine maps are tried on each side, by the number of inputs; the largest class of five
inputs has 9,999,360 normal forms, so that some dozen pairs are expected to meet."""
_COMPARED = 24
"""Of so many meetings the one with the fewest terms is taken."""
_AFFINE_PART = np.uint32(1 << 0 | 1 << 1 | 1 << 2 | 1 << 4 | 1 << 8 | 1 << 16)
_LOWER = (0x55555555, 0x33333333, 0x0F0F0F0F, 0x00FF00FF, 0x0000FFFF)


def and_count(inputs: int, table: int) -> int:
    """The fewest ANDs of one function. ValueError for more than 5 inputs or a table too long."""
    _check(inputs, table)
    return _and_count(_widened(inputs, table))


def and_counts(inputs: int, tables: Tables) -> NDArray[np.uint8]:
    """The fewest ANDs of many functions: uint32 (k,) to uint8 (k,), about half a microsecond each."""
    if not 0 <= inputs <= MOST_INPUTS or tables.dtype != np.uint32 or tables.ndim != 1:
        raise ValueError(f"uint32 (k,) and at most {MOST_INPUTS} inputs wanted, not {tables.dtype}, {inputs}")
    wide = tables & np.uint32((1 << (1 << inputs)) - 1)
    for step in range(inputs, MOST_INPUTS):
        wide = wide | wide << np.uint32(1 << step)
    keys, ands = _sorted_keys()
    found: NDArray[np.uint8] = ands[np.searchsorted(keys, class_keys(wide))]
    return found


def circuit(inputs: int, table: int) -> Network:
    """A network with as many ANDs as `and_count` says, found in some milliseconds and remembered."""
    return _circuit(inputs, table)


def chain_of(inputs: int, table: int, variant: int = 0) -> ProductChain:
    """The same as a chain of products. Other `variant`s give other chains, where the class has several."""
    _check(inputs, table)
    return _chain(inputs, table, variant)


def class_keys(tables: Tables) -> NDArray[np.int64]:
    """A number for each function of five inputs that only functions of its class have; uint32 to int64 (k,).

    32768 times half the sum of the absolute Walsh coefficients plus the sum of the cubes of a quarter of the
    absolute autocorrelations.
    """
    keys = np.empty(len(tables), dtype=np.int64)
    for begin in range(0, len(tables), _CHUNK):
        some = np.ascontiguousarray(tables[begin : begin + _CHUNK]).astype("<u4")
        bits = np.unpackbits(some.view(np.uint8).reshape(-1, 4), axis=1, bitorder="little")
        walsh = np.ascontiguousarray(1 - 2 * bits.T.astype(np.int8))
        _transform(walsh)
        squares = walsh.astype(np.int16)
        squares *= squares
        _transform(squares)
        quarters = np.abs(squares) >> 7
        cubes = (quarters * quarters * quarters).sum(axis=0, dtype=np.int64)
        keys[begin : begin + _CHUNK] = (np.abs(walsh).sum(axis=0, dtype=np.int64) >> 1 << 15) + cubes
    return keys


def _transform(rows: NDArray[np.int8] | NDArray[np.int16]) -> None:
    """The Walsh-Hadamard transform over the 32 rows, in place."""
    for step in range(5):
        parts = rows.reshape(32 >> (step + 1), 2, 1 << step, -1)
        total = parts[:, 0] + parts[:, 1]
        parts[:, 1] = parts[:, 0] - parts[:, 1]
        parts[:, 0] = total


def normal_forms(tables: Tables) -> Tables:
    """The algebraic normal forms without affine terms: bit m is the product of variables in m."""
    forms = tables.copy()
    for step, lower in enumerate(_LOWER):
        forms ^= (forms & np.uint32(lower)) << np.uint32(1 << step)
    return forms & ~_AFFINE_PART


@dataclass(frozen=True)
class _Class:
    """A class of functions of five inputs: orbit says how many normal forms without affine part it has."""

    orbit: int
    chain: ProductChain


@cache
def classes() -> dict[int, _Class]:
    """The classes by their key."""
    from revsynth.logic.affine_class_data import CLASSES

    return {
        key: _Class(orbit, ProductChain(5, products, (output,))) for key, orbit, products, output in CLASSES
    }


@cache
def _sorted_keys() -> tuple[NDArray[np.int64], NDArray[np.uint8]]:
    rows = sorted((key, len(found.chain.products)) for key, found in classes().items())
    return np.array([k for k, _ in rows], dtype=np.int64), np.array([a for _, a in rows], dtype=np.uint8)


@lru_cache(maxsize=1 << 18)
def _and_count(wide: int) -> int:
    return int(and_counts(5, np.array([wide], dtype=np.uint32))[0])


def _check(inputs: int, table: int) -> None:
    if not 0 <= inputs <= MOST_INPUTS:
        raise ValueError(f"affine classes are known up to {MOST_INPUTS} inputs, not {inputs}")
    if not 0 <= table < 1 << (1 << inputs):
        raise ValueError(f"a table of {inputs} inputs has {1 << inputs} bits: {table:#x} does not fit")


def _widened(inputs: int, table: int) -> int:
    for step in range(inputs, MOST_INPUTS):
        table |= table << (1 << step)
    return table


@lru_cache(maxsize=1 << 14)
def _circuit(inputs: int, table: int) -> Network:
    return to_network(chain_of(inputs, table))


@lru_cache(maxsize=1 << 14)
def _chain(inputs: int, table: int, variant: int) -> ProductChain:
    wide = _widened(inputs, table)
    key = int(class_keys(np.array([wide], dtype=np.uint32))[0])
    standard = classes()[key].chain
    width = 4 if inputs <= 4 else 5
    if standard.products:
        forward, back = _meeting(width, key, wide, variant)
        chain = substituted(standard, 5, _composed(width, forward, back))
        affine = _affine_difference(wide, chain.tables()[0])
        chain = ProductChain(5, chain.products, (chain.outputs[0] ^ affine,))
    else:
        chain = ProductChain(5, (), (_affine_difference(wide, 0),))
    absent = [1 << (1 + i) if i < inputs else 0 for i in range(5)]
    return substituted(chain, inputs, absent)


def _affine_difference(table: int, other: int) -> Sum:
    """The affine function (a sum of constant and inputs) between two functions of one class, mapped alike."""
    difference = table ^ other
    constant = difference & 1
    return constant | sum(2 << i for i in range(5) if (difference >> (1 << i) & 1) != constant)


@dataclass(frozen=True)
class _Maps:
    """Affine maps x -> A x + b: images (k, width + 1) are A's columns and then b; points (k, 2^width)."""

    images: NDArray[np.uint8]
    points: NDArray[np.uint8]


@cache
def _maps(width: int, batch: int) -> _Maps:
    """Batch 0: all permutations of inputs with all complements, then random maps; later batches: random."""
    rows = Random(1000 * width + batch).words(4 * _IMAGES[width])
    fields = (rows[:, None] >> np.arange(0, 8 * (width + 1), 8, dtype=np.uint64)).astype(np.uint8)
    fields &= np.uint8((1 << width) - 1)
    points = _points(fields, width)
    distinct = (np.sort(points, axis=1) == np.arange(1 << width, dtype=np.uint8)).all(axis=1)
    fields = fields[distinct][: _IMAGES[width]]
    if batch == 0:
        fields = np.concatenate([_signed_permutations(width), fields])
    return _Maps(fields, _points(fields, width))


def _points(images: NDArray[np.uint8], width: int) -> NDArray[np.uint8]:
    points = np.repeat(images[:, width:], 1 << width, axis=1)
    x = np.arange(1 << width, dtype=np.uint8)
    for i in range(width):
        points ^= images[:, i : i + 1] * (x >> np.uint8(i) & np.uint8(1))
    return points


def _signed_permutations(width: int) -> NDArray[np.uint8]:
    from itertools import permutations

    rows = [
        [*(1 << p for p in order), shift]
        for shift in range(1 << width)
        for order in permutations(range(width))
    ]
    return np.array(rows, dtype=np.uint8)


def _image_forms(width: int, wide: int, maps: _Maps) -> Tables:
    """The normal forms, without affine part, of the function after each map."""
    bits = np.array([wide >> x & 1 for x in range(1 << width)], dtype=np.uint8)
    moved = np.packbits(bits[maps.points], axis=1, bitorder="little")
    if width == 5:
        return normal_forms(moved.view("<u4").ravel().astype(np.uint32))
    narrow = moved.view("<u2").ravel().astype(np.uint32)
    return normal_forms(narrow | narrow << np.uint32(16))


@cache
def _standard_images(width: int, key: int) -> tuple[Tables, NDArray[np.int64]]:
    """The different images of the class's own function, ascending, and the first map that gives each."""
    table = classes()[key].chain.tables()[0]
    forms, first = np.unique(_image_forms(width, table, _maps(width, 0)), return_index=True)
    return forms, first


def _meeting(width: int, key: int, wide: int, variant: int) -> tuple[NDArray[np.uint8], NDArray[np.uint8]]:
    """Maps A of the class's own function r and B of the function f with r(A x) = f(B x) + affine.

    Variant 0 compares all maps and takes the meeting with the fewest terms; others stop at the first one.
    """
    standard, theirs = _standard_images(width, key)
    found = classes()[key]
    needed = 64 + 4 * found.orbit // len(standard) if variant else 1 << 20
    for maps in _batches(width, variant, needed):
        forms, first = np.unique(_image_forms(width, wide, maps), return_index=True)
        place = np.minimum(np.searchsorted(standard, forms), len(standard) - 1)
        hits = np.flatnonzero(standard[place] == forms)
        if not len(hits):
            continue
        mine, other = first[hits], theirs[place[hits]]
        order = np.argsort(mine + other, kind="stable")[: 1 if variant else _COMPARED]
        pairs = [(_maps(width, 0).images[other[i]], maps.images[mine[i]]) for i in order]
        return min(pairs, key=lambda pair: substituted(found.chain, 5, _composed(width, *pair)).weight)
    raise AssertionError("random images of one class did not meet")


def _batches(width: int, variant: int, needed: int) -> Iterator[_Maps]:
    """Maps to try, batch by batch, `needed` at once; every variant begins elsewhere."""
    batch = variant // 32
    start = _IMAGES[width] // 32 * (variant % 32)
    for number in range(batch, batch + 64):
        maps = _maps(width, number)
        for begin in range(start, len(maps.images), needed):
            yield _Maps(maps.images[begin : begin + needed], maps.points[begin : begin + needed])
        start = 0


def _composed(width: int, forward: NDArray[np.uint8], back: NDArray[np.uint8]) -> list[Sum]:
    """For y = B x: the inputs of r, A x, as sums over the constant and the bits of y; beyond `width` 0."""
    inverse = _inverse([int(column) for column in back[:width]], width)
    columns, shift = [int(column) for column in forward[:width]], int(forward[width])
    matrix = []
    constant = shift ^ _times(columns, _times(inverse, int(back[width])))
    for column in inverse:
        matrix.append(_times(columns, column))
    return [
        (constant >> bit & 1) | sum(2 << j for j in range(width) if matrix[j] >> bit & 1)
        for bit in range(width)
    ] + [0] * (5 - width)


def _times(columns: list[int], vector: int) -> int:
    return mapped(vector, columns)


def _inverse(columns: list[int], width: int) -> list[int]:
    """The columns of the inverse of an invertible matrix over GF(2), by elimination."""
    rows = [(column, 1 << j) for j, column in enumerate(columns)]
    for bit in range(width):
        pivot = next(i for i in range(bit, width) if rows[i][0] >> bit & 1)
        rows[bit], rows[pivot] = rows[pivot], rows[bit]
        for i in range(width):
            if i != bit and rows[i][0] >> bit & 1:
                rows[i] = (rows[i][0] ^ rows[bit][0], rows[i][1] ^ rows[bit][1])
    return [combination for _, combination in rows]
