"""The comment lines that a text opens with."""

from __future__ import annotations

from typing import get_args

import pytest

from revsynth.circuit.model import CircuitBuilder
from revsynth.options import Format
from revsynth.pipeline import same_gates
from revsynth.qasm import read, with_header, write


@pytest.mark.parametrize("format", get_args(Format))
def test_a_header_may_be_put_on_later(format: Format) -> None:
    c = CircuitBuilder()
    c.add_register("q", 2)
    c.cx(1, 0)
    circuit = c.build()
    bare = write(circuit, format=format)
    whole = with_header(bare, ["one\ntwo", "three"], format=format)
    assert whole == write(circuit, format=format, header=["one\ntwo", "three"])
    assert read(whole).comments == (() if format == "plain" else ("one two", "three"))
    assert same_gates(read(whole).circuit, read(bare).circuit)
