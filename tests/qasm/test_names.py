"""Register names for the words of a spec."""

from __future__ import annotations

import openqasm3
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.circuit.model import CircuitBuilder
from revsynth.errors import SpecError
from revsynth.qasm import read, write
from revsynth.qasm.names import register_names
from revsynth.qasm.vocabulary import OURS, RESERVED


@pytest.mark.parametrize(
    ("name", "in_3", "in_2"),
    [
        ("a", "a", "a"),
        ("total", "total", "total"),
        ("cell[0]", "cell_0", "cell_0"),
        ("cell[12]", "cell_12", "cell_12"),
        ("x", "x_", "x_"),
        ("y", "y_", "y_"),
        ("p", "p_", "p_"),
        ("id", "id_", "id_"),
        ("h", "h_", "h_"),
        ("ccx", "ccx_", "ccx_"),
        ("c3sqrtx", "c3sqrtx_", "c3sqrtx_"),
        ("bit", "bit_", "bit_"),
        ("opaque", "opaque_", "opaque_"),
        ("tau", "tau_", "tau_"),
        ("ln", "ln_", "ln_"),
        ("arccos", "arccos_", "arccos_"),
        ("popcount", "popcount_", "popcount_"),
        ("duration", "duration_", "duration_"),
        ("Lamp", "Lamp", "r_Lamp"),
        ("X", "X", "r_X"),
        ("U", "U_", "r_U_"),
        ("CX", "CX_", "r_CX_"),
        ("OPENQASM", "OPENQASM_", "r_OPENQASM_"),
        ("u[3]", "u_3", "u_3"),
    ],
)
def test_names(name: str, in_3: str, in_2: str) -> None:
    assert register_names([name], version=3) == {name: in_3}
    assert register_names([name], version=2) == {name: in_2}


@pytest.mark.parametrize("name", OURS)
def test_names_that_are_ours_are_refused(name: str) -> None:
    with pytest.raises(
        SpecError, match=f"the word '{name}' would be the register '{name}', which revsynth keeps"
    ):
        register_names([name], version=3)


@pytest.mark.parametrize(
    ("names", "message"),
    [
        (["x", "x_"], "the words 'x' and 'x_' would both be the register 'x_'"),
        (["cell_0", "cell[0]"], "the words 'cell_0' and 'cell\\[0\\]' would both be the register 'cell_0'"),
        (["a", "a"], "the words 'a' and 'a' would both be"),
    ],
)
def test_collisions_are_refused(names: list[str], message: str) -> None:
    with pytest.raises(SpecError, match=message):
        register_names(names, version=3)


def test_a_collision_in_one_version_only() -> None:
    assert len(register_names(["Lamp", "r_Lamp"], version=3)) == 2
    with pytest.raises(SpecError, match="would both be the register 'r_Lamp'"):
        register_names(["Lamp", "r_Lamp"], version=2)


def test_the_order_is_kept() -> None:
    assert list(register_names(["b", "a", "x"], version=3)) == ["b", "a", "x"]


NAMES = st.one_of(
    st.sampled_from(sorted(RESERVED - set("πτℇ"))),
    st.from_regex(r"[A-Za-z][A-Za-z0-9_]{0,6}", fullmatch=True),
)


@given(st.lists(NAMES, min_size=1, max_size=4, unique=True))
def test_what_is_named_can_be_written_and_read(names: list[str]) -> None:
    for version, format in ((3, "openqasm3"), (2, "openqasm2")):
        try:
            registers = register_names(names, version=version)
        except SpecError:
            continue
        builder = CircuitBuilder()
        for register in registers.values():
            builder.add_register(register, 2)
        builder.cx(0, 1)
        circuit = builder.build()
        text = write(circuit, format=format)
        assert read(text).circuit == circuit
        if version == 3:
            openqasm3.parse(text)


def test_every_keyword_of_the_reference_parser_is_reserved() -> None:
    """The literal tokens of the published grammar, from the package `openqasm3`."""
    import importlib
    import pkgutil

    package = importlib.import_module("openqasm3._antlr")
    found: set[str] = set()
    for module in pkgutil.iter_modules([f"{path}/_4_13" for path in package.__path__]):
        if module.name == "qasm3Lexer":
            lexer = importlib.import_module("openqasm3._antlr._4_13.qasm3Lexer").qasm3Lexer
            found = {name.strip("'") for name in lexer.literalNames}
    words = {name for name in found if name.isidentifier() and name.isascii()}
    assert len(words) > 40
    assert words <= RESERVED
