"""Permutations: the images of all inputs, and whether they are one-to-one over the domain."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from revsynth.errors import SpecError
from revsynth.spec.layout import describe, value_range
from revsynth.spec.model import Spec, Word
from revsynth.spec.output_words import check_length
from revsynth.spec.over_domain import OverDomain


def listed_images(
    values: tuple[int | None, ...], over: OverDomain
) -> tuple[NDArray[np.int32], NDArray[np.bool_]]:
    """Images by combined index, and where they are fixed (not '-', and inside the domain), shape (2**n,).

    Raises SpecError for a wrong length, an image out of range, and two inputs with one image.
    """
    place = "[permutation] values"
    check_length(len(values), over, place)
    size = 1 << over.inputs
    for index, image in enumerate(values):
        if image is not None and not 0 <= image < size:
            raise over.error(f"the image of {index} is {image}: 0 to {size - 1} are wanted", place)
    fixed = np.array([image is not None for image in values])
    if over.needed is not None:
        fixed &= over.needed
    images = np.array([0 if image is None else image for image in values], dtype=np.int32)
    _one_to_one(images, fixed, over, place)
    return images, fixed


def mapped_images(
    new_values: Mapping[str, str], over: OverDomain
) -> tuple[NDArray[np.int32], NDArray[np.bool_]]:
    """Images where some words (or elements of arrays) get new values and the others keep theirs.

    Raises SpecError naming an input where a new value does not fit its word, and naming two inputs of the
    domain with one image; ExpressionError as `OverDomain.numbers` does.
    """
    images = np.arange(1 << over.inputs, dtype=np.int32)
    for name, text in new_values.items():
        shift, word = register_of(over.spec, name)
        place = f"[permutation] map {name}"
        values = over.numbers(text, place)
        lowest, highest = value_range(word)
        at = over.first((values < lowest) | (values > highest))
        if at is not None:
            raise unfit_error(over.spec, (name, word), text, int(values[at]), at)
        pattern = (values & ((1 << word.bits) - 1)).astype(np.int32)
        images = (images & ~np.int32(((1 << word.bits) - 1) << shift)) | (pattern << shift)
    fixed = np.ones(1 << over.inputs, dtype=bool) if over.needed is None else over.needed
    images = np.where(fixed, images, 0)
    _one_to_one(images, fixed, over, "[permutation] map")
    return images, fixed


def _wrapped(text: str, word: Word) -> str:
    """How to write an expression so that its values wrap around within the word."""
    shown, size = " ".join(text.split()), 1 << word.bits
    return f"(({shown}) + {size // 2}) % {size} - {size // 2}" if word.signed else f"({shown}) % {size}"


def unfit_error(spec: Spec, word: tuple[str, Word], text: str, value: int, index: int) -> SpecError:
    """The error for a new value that does not fit its word (given by its name and size) at an input."""
    name, size = word
    lowest, highest = value_range(size)
    return SpecError(
        f"the new value is {value} at {describe(spec.inputs, index)}, but {name} holds {lowest} to "
        f"{highest}: write {_wrapped(text, size)} or restrict the domain",
        source=spec.source,
        place=f"[permutation] map {name}",
    )


def register_of(spec: Spec, name: str) -> tuple[int, Word]:
    """The lowest bit of a word or array element in the combined index, and how wide it is.

    Raises SpecError where there is none.
    """
    found = _registers(spec.inputs).get(name)
    if found is None:
        raise SpecError(_no_such_word(name, spec.inputs), source=spec.source, place="[permutation] map")
    return found


def _registers(words: tuple[Word, ...]) -> dict[str, tuple[int, Word]]:
    """Lowest bit and word of every single word and array element, by name."""
    found: dict[str, tuple[int, Word]] = {}
    shift = 0
    for word in words:
        for name, bits in word.elements():
            found[name] = (shift, Word(name, bits, word.signed))
            shift += bits
    return found


def _no_such_word(name: str, words: tuple[Word, ...]) -> str:
    for word in words:
        if word.name == name and word.count is not None:
            return f'{name} is an array: give its words new values one by one, such as "{name}[0]"'
    return f"there is no word {name[:40]!r}: the inputs are {', '.join(word.name for word in words[:8])}"


def _one_to_one(images: NDArray[np.int32], fixed: NDArray[np.bool_], over: OverDomain, place: str) -> None:
    inputs = np.flatnonzero(fixed)
    first = np.full(images.size, -1, dtype=np.int32)
    first[images[inputs[::-1]]] = inputs[::-1]
    later = inputs[first[images[inputs]] != inputs]
    if later.size:
        other = int(later[0])
        one = int(first[images[other]])
        raise over.error(
            f"not one-to-one: {over.named(one)} and {over.named(other)} both become "
            f"{over.named(int(images[one]))}",
            place,
        )
