"""Shortest circuits of four lines with the tables at hand; both are kept while the program runs."""

from __future__ import annotations

from revsynth.optimal.classes import Classes, Progress
from revsynth.optimal.meeting import Answer, shortest
from revsynth.optimal.table_file import classes_up_to

KEPT = 256
"""So many answers are kept before all are forgotten."""

_tables: dict[int, Classes] = {}
_answers: dict[tuple[tuple[int, ...], int], Answer] = {}


def shortest_with(size: int, words: tuple[int, ...], progress: Progress) -> Answer:
    """`meeting.shortest` with the table up to `size`, which is read, or found and kept, on first use."""
    if (words, size) not in _answers:
        if size not in _tables:
            _tables[size] = classes_up_to(size, progress)
        answer = shortest(words, _tables[size], progress)
        if len(_answers) >= KEPT:
            _answers.clear()
        _answers[words, size] = answer
    return _answers[words, size]
