"""The column of a CNF: which inputs satisfy every clause."""

from __future__ import annotations

from functools import reduce

import numpy as np

from revsynth.logic.truth_table import Column, last_word_mask, ones, variable, zeros
from revsynth.spec.model import Clauses


def clauses_column(clauses: Clauses) -> Column:
    """The inputs at which all clauses hold, packed; variable i is input bit i - 1.

    An empty clause never holds; an empty XOR clause does not either (its sum is 0, and 1 is wanted).
    """
    inputs = clauses.variables
    negated = last_word_mask(inputs)
    positive = {
        abs(literal): variable(inputs, abs(literal) - 1)
        for clause in (*clauses.clauses, *clauses.xor_clauses)
        for literal in clause
    }

    def column(literal: int) -> Column:
        return positive[literal] if literal > 0 else positive[-literal] ^ negated

    result = ones(inputs)
    for clause in clauses.clauses:
        result &= reduce(np.bitwise_or, map(column, clause), zeros(inputs))
    for clause in clauses.xor_clauses:
        result &= reduce(np.bitwise_xor, map(column, clause), zeros(inputs))
    return result
