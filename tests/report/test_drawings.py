"""Drawings: every operation is there, in order, on its lines; the same circuit gives the same bytes."""

from __future__ import annotations

import itertools
import math
import xml.etree.ElementTree as ElementTree

import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.cascade import PHASE, Cascade, Gate
from revsynth.circuit.model import Circuit, CircuitBuilder, Guard, Kind
from revsynth.errors import UsageError
from revsynth.report import circuit_svg
from revsynth.report.cascade_svg import draw_cascade
from revsynth.report.circuit_svg import draw_svg
from revsynth.report.columns import angle_text, pack, wrap
from revsynth.report.export import svg_to_pdf, svg_to_png
from revsynth.report.terminal import draw_text


def example() -> Circuit:
    builder = CircuitBuilder()
    builder.add_register("lamp", 2)
    builder.add_register("work", 1)
    builder.add_bits("seen", 1)
    builder.x(2, (0, 3))
    builder.t(0)
    builder.h(2)
    builder.measure(2, 0)
    builder.z(1, (0,), (Guard((0,)),))
    return builder.build()


@st.composite
def circuits(draw: st.DrawFn) -> Circuit:
    builder = CircuitBuilder()
    builder.add_register("a", draw(st.integers(1, 4)))
    builder.add_register("work", draw(st.integers(0, 3)))
    for _ in range(draw(st.integers(0, 25))):
        lines = draw(st.permutations(range(builder.qubits)))
        count = draw(st.integers(0, builder.qubits - 1))
        controls = sorted(2 * line + draw(st.integers(0, 1)) for line in lines[1 : count + 1])
        builder.add(draw(st.sampled_from([Kind.X, Kind.Z, Kind.H, Kind.T])), lines[:1], controls)
    return builder.build()


@given(circuits(), st.integers(0, 1))
def test_packing_keeps_every_operation_and_the_order_on_each_line(circuit: Circuit, gap: int) -> None:
    columns = pack(circuit, gap=gap)
    packed = [op for column in columns for op in column.operations]
    assert sorted(packed) == sorted(circuit)
    for line in range(circuit.qubits):
        on_line = [op for op in circuit if line in op.qubits]
        assert [op for op in packed if line in op.qubits] == on_line
    for column in columns:
        spans = sorted((min(op.qubits), max(op.qubits)) for op in column.operations)
        assert all(low[1] + gap < high[0] for low, high in itertools.pairwise(spans))


@given(circuits(), st.integers(60, 600))
def test_wrapped_rows_hold_all_columns_and_keep_to_the_room(circuit: Circuit, room: int) -> None:
    columns = pack(circuit)
    rows = wrap(columns, lambda _: 30, room)
    assert [column for row in rows for column in row] == columns
    assert all(30 * len(row) <= room for row in rows)


def test_each_bit_written_or_read_has_its_own_place_in_the_lane() -> None:
    builder = CircuitBuilder()
    builder.add_register("a", 4)
    builder.add_bits("seen", 4)
    for qubit in range(4):
        builder.measure(qubit, qubit)
    for column in pack(builder.build()):
        assert len(column.operations) == 1


def test_a_gate_under_if_stands_after_the_measurement_it_reads() -> None:
    columns = pack(example())
    place = {op.kind: index for index, column in enumerate(columns) for op in column.operations}
    assert place[Kind.Z] > place[Kind.MEASURE]


def test_the_terminal_drawing_line_by_line() -> None:
    assert draw_text(example(), width=60) == "\n".join(
        [
            "lamp[0] ─●──┤T├──────●──",
            "lamp[1] ─○───────────●──",
            "         │",
            "   work ─⊕──┤H├─┤M├─────",
            "   bits          <0  ?0",
        ]
    )


def test_plain_ascii_holds_only_ascii_and_keeps_to_the_width() -> None:
    text = draw_text(example(), width=60, ascii_only=True)
    assert text.isascii()
    assert "lamp[1] -o-" in text
    builder = CircuitBuilder()
    builder.add_register("a", 3)
    for _ in range(200):
        builder.x(0, (2, 4))
    long = draw_text(builder.build(), width=80, ascii_only=True)
    assert max(map(len, long.splitlines())) <= 80
    assert long.count("+") == 200


def test_the_picture_is_well_formed_and_shows_each_symbol() -> None:
    picture = draw_svg(example(), title='Lamps <1> & "2"')
    root = ElementTree.fromstring(picture)
    texts = [element.text for element in root.iter("{http://www.w3.org/2000/svg}text")]
    assert 'Lamps <1> & "2"' in texts
    for wanted in ("lamp", "work", "T", "H", "M", "waits for 0", "only if this bit is 1"):
        assert wanted in texts
    assert picture == draw_svg(example(), title='Lamps <1> & "2"')
    assert "http" not in picture.replace("http://www.w3.org/2000/svg", "")


def test_a_long_circuit_is_wrapped_and_not_widened() -> None:
    builder = CircuitBuilder()
    builder.add_register("a", 12)
    for index in range(300):
        builder.x(index % 12, (2 * ((index + 5) % 12),))
    root = ElementTree.fromstring(draw_svg(builder.build(), width=900))
    assert int(root.attrib["width"]) <= 900
    drawn = [e for e in root.iter("{http://www.w3.org/2000/svg}circle") if e.attrib["r"] == "8"]
    assert len(drawn) == 301  # 300 gates and the legend's


def test_an_empty_circuit_can_be_drawn() -> None:
    builder = CircuitBuilder()
    builder.add_register("a", 1)
    assert draw_text(builder.build()).startswith("a")
    assert draw_svg(builder.build()).startswith("<svg")
    assert draw_svg(CircuitBuilder().build()).startswith("<svg")


def test_png_and_pdf_carry_their_signatures_and_are_deterministic() -> None:
    picture = draw_svg(example(), title="Lamps")
    png, pdf = svg_to_png(picture), svg_to_pdf(picture)
    assert png.startswith(b"\x89PNG\r\n\x1a\n")
    assert pdf.startswith(b"%PDF-")
    assert pdf == svg_to_pdf(picture)
    assert png == svg_to_png(picture)


@pytest.mark.parametrize(
    ("angle", "text"),
    [
        (0.0, "0"),
        (math.pi, "π"),
        (-math.pi / 4, "-π/4"),
        (3 * math.pi / 2, "3π/2"),
        (0.1234, "0.1234"),
    ],
)
def test_angles_are_shown_as_fractions_of_pi_where_they_are(angle: float, text: str) -> None:
    assert angle_text(angle) == text


def test_notebooks_show_circuits_and_cascades_as_pictures() -> None:
    cascade = Cascade.from_gates(3, [Gate(2, (0, 3)), Gate(PHASE, (0, 3, 4)), Gate(PHASE, ())])
    assert cascade._repr_svg_() == draw_cascade(cascade)
    assert "turns the sign" in draw_cascade(cascade)
    assert example()._repr_svg_() == draw_svg(example())
    assert draw_cascade(Cascade.from_gates(0, [])).startswith("<svg")


def test_pictures_that_would_be_too_large_are_refused_in_one_line(monkeypatch: pytest.MonkeyPatch) -> None:
    builder = CircuitBuilder()
    builder.add_register("a", 12)
    for index in range(4000):
        builder.x(index % 12, (2 * ((index + 5) % 12),))
    long = draw_svg(builder.build())
    with pytest.raises(UsageError, match=r"a PDF page ends at 19,200: write \.svg"):
        svg_to_pdf(long)
    with pytest.raises(UsageError, match=r"too large for a PNG of 60,000,000 pixels: write \.svg"):
        svg_to_png(long)
    monkeypatch.setattr(circuit_svg, "MOST_DRAWN", 3999)
    with pytest.raises(UsageError, match="4,000 operations are too many for a picture, 3,999 at most"):
        draw_svg(builder.build())
    assert builder.build()._repr_svg_() is None
