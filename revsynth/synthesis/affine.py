"""Recognising affine functions, free values included, by linear algebra over GF(2) on the cared inputs.

An *affine form* on n inputs is an integer: bit i is the coefficient of input bit i, bit n the constant.
"""

from __future__ import annotations

from typing import TypeAlias

import numpy as np

from revsynth.logic.function import Function
from revsynth.logic.truth_table import Column, first_inputs, ones, variable, zeros

Form: TypeAlias = int


class Echelon:
    """Vectors over GF(2) in echelon form; each carries the combination of added vectors that it is."""

    def __init__(self) -> None:
        self._rows: dict[int, tuple[int, int]] = {}
        self._added = 0

    def __len__(self) -> int:
        return len(self._rows)

    def reduce(self, vector: int) -> tuple[int, int]:
        """(rest, combination): `vector` less the XOR of the added vectors in `combination` is `rest`."""
        combination = 0
        rest, bits = vector, vector
        while bits:
            top = bits.bit_length() - 1
            if top in self._rows:
                row, made_of = self._rows[top]
                rest ^= row
                bits ^= row
                combination ^= made_of
            bits &= (1 << top) - 1
        return rest, combination

    def add(self, vector: int) -> bool:
        """Take `vector` in; False where it depends on those before it (then nothing changes)."""
        rest, combination = self.reduce(vector)
        if not rest:
            return False
        self._rows[rest.bit_length() - 1] = (rest, combination ^ (1 << self._added))
        self._added += 1
        return True


class CaredHull:
    """The affine hull of the inputs in `care`: a basis of them, and the forms that vanish on all of them."""

    def __init__(self, inputs: int, care: Column) -> None:
        self.inputs = inputs
        self.points: list[int] = []
        self._echelon = Echelon()
        for point in (0, *(1 << bit for bit in range(inputs))):
            if (int(care[point >> 6]) >> (point & 63)) & 1:
                self._add(point)
        self.vanishing = self._null_forms()
        while (outside := self._outside(care)) is not None:
            self._add(outside)
            self.vanishing = self._null_forms()

    def form_through(self, values: Column) -> Form:
        """A form that takes the values of `values` at the basis points."""
        form = 0
        for point, dual in zip(self.points, self._duals(), strict=True):
            if (int(values[point >> 6]) >> (point & 63)) & 1:
                form ^= dual
        return form

    def _add(self, point: int) -> None:
        if self._echelon.add(point | (1 << self.inputs)):
            self.points.append(point)

    def _outside(self, care: Column) -> int | None:
        for form in self.vanishing:
            found = first_inputs(evaluate_form(form, self.inputs) & care, 1)
            if found:
                return found[0]
        return None

    def _solved(self) -> tuple[list[int], list[int], list[int]]:
        """Gauss-Jordan over the points: (pivot bits, reduced rows, combination of points of each row)."""
        rows = [point | (1 << self.inputs) for point in self.points]
        made_of = [1 << index for index in range(len(rows))]
        pivots: list[int] = []
        for index in range(len(rows)):
            pivot = rows[index] & -rows[index]
            pivots.append(pivot.bit_length() - 1)
            for other in range(len(rows)):
                if other != index and rows[other] & pivot:
                    rows[other] ^= rows[index]
                    made_of[other] ^= made_of[index]
        return pivots, rows, made_of

    def _duals(self) -> list[Form]:
        """For each point a form that is 1 there and 0 at the other basis points."""
        pivots, _, made_of = self._solved()
        duals = [0] * len(self.points)
        for pivot, combination in zip(pivots, made_of, strict=True):
            for index in range(len(self.points)):
                if (combination >> index) & 1:
                    duals[index] |= 1 << pivot
        return duals

    def _null_forms(self) -> list[Form]:
        pivots, rows, _ = self._solved()
        forms = []
        for free in range(self.inputs + 1):
            if free in pivots:
                continue
            form = 1 << free
            for pivot, row in zip(pivots, rows, strict=True):
                if (row >> free) & 1:
                    form |= 1 << pivot
            forms.append(form)
        return forms


def evaluate_form(form: Form, inputs: int) -> Column:
    """The column of an affine form."""
    column = ones(inputs) if (form >> inputs) & 1 else zeros(inputs)
    for bit in range(inputs):
        if (form >> bit) & 1:
            column = column ^ variable(inputs, bit)
    return column


def affine_form(inputs: int, values: Column, care: Column, hull: CaredHull) -> Form | None:
    """A sparse form that agrees with `values` wherever `care` is 1; None where there is none."""
    form = hull.form_through(values)
    if np.any((evaluate_form(form, inputs) ^ values) & care):
        return None
    return sparser(form, hull.vanishing)


def sparser(form: Form, vanishing: list[Form]) -> Form:
    """The form less those that vanish where it matters, as long as that makes it shorter."""
    improved = True
    while improved:
        improved = False
        for other in vanishing:
            if (form ^ other).bit_count() < form.bit_count():
                form ^= other
                improved = True
    return form


def affine_outputs(function: Function) -> tuple[list[Form], list[CaredHull]] | int:
    """A form and the hull of its cared inputs for each output, or the number of an output that has none."""
    forms: list[Form] = []
    hulls: list[CaredHull] = []
    for output in range(function.outputs):
        care = function.care[output]
        same = next((k for k in range(output) if np.array_equal(function.care[k], care)), None)
        hull = CaredHull(function.inputs, care) if same is None else hulls[same]
        form = affine_form(function.inputs, function.values[output], care, hull)
        if form is None:
            return output
        forms.append(form)
        hulls.append(hull)
    return forms, hulls
