"""Reading files by ending and by name, standard input, and the command line's own spec."""

from __future__ import annotations

import io
import sys
from pathlib import Path

import numpy as np
import pytest

from revsynth.errors import SpecError
from revsynth.logic.truth_table import unpack
from revsynth.spec.inline import inline_spec
from revsynth.spec.model import Word
from revsynth.spec.read import READERS, read_spec
from revsynth.spec.understand import understand

TOML = '[inputs]\na = 3\n[predicate]\nwhere = "a == 4"\n'
CNF = "p cnf 2 1\n1 0\n"
PLA = ".i 2\n.o 1\n1- 1\n.e\n"


def write(folder: Path, name: str, text: str | bytes) -> str:
    path = folder / name
    path.write_bytes(text if isinstance(text, bytes) else text.encode())
    return str(path)


@pytest.mark.parametrize(
    ("name", "text", "bits"),
    [
        ("a.toml", TOML, 3),
        ("A.TOML", TOML, 3),
        ("a.cnf", CNF, 2),
        ("a.dimacs", CNF, 2),
        ("a.pla", PLA, 2),
        ("a.toml", TOML.replace("\n", "\r\n"), 3),
        ("a.toml", b"\xef\xbb\xbf" + TOML.encode(), 3),
        ("a.cnf", CNF.replace("\n", "\r\n"), 2),
        ("a.cnf", CNF.replace("\n", "\r"), 2),
        ("a.cnf", b"c caf\xe9\n" + CNF.encode(), 2),
        ("a.pla", b"# caf\xe9\n" + PLA.encode(), 2),
    ],
)
def test_by_ending(tmp_path: Path, name: str, text: str | bytes, bits: int) -> None:
    spec = read_spec(write(tmp_path, name, text))
    assert spec.input_bits == bits
    assert spec.source == name


def test_by_name_of_the_format(tmp_path: Path) -> None:
    assert read_spec(write(tmp_path, "a.txt", CNF), from_format="cnf").inputs == (Word("v", 2),)
    assert read_spec(write(tmp_path, "noending", PLA), from_format="PLA").inputs == (Word("v", 2),)
    assert [reader.name for reader in READERS] == ["toml", "cnf", "pla", "blif", "bench", "aiger", "bristol"]


def test_standard_input(monkeypatch: pytest.MonkeyPatch) -> None:
    for text, from_format, bits in ((TOML, None, 3), (CNF, "cnf", 2)):
        monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(text.encode())))
        spec = read_spec("-", from_format=from_format)
        assert spec.input_bits == bits
        assert spec.source == "standard input"


@pytest.mark.parametrize(
    ("message", "name", "text"),
    [
        ("the ending '.txt' is unknown: .toml, .cnf, .dimacs, .pla, .blif, .bench, .aag, .aig, .bristol are",
         "a.txt", TOML),
        ("the name has no ending: .toml", "noending", TOML),
        ("this is UTF-16 text: save it as UTF-8", "a.toml", TOML.encode("utf-16")),
        ("line 2: this is not UTF-8 text", "a.toml", b"title = 'x'\n# caf\xe9\n"),
        ("byte 3: this is not a text file: it has a zero byte", "a.cnf", b"p c\0nf"),
    ],
)  # fmt: skip
def test_files_that_are_no_specs(tmp_path: Path, message: str, name: str, text: str | bytes) -> None:
    path = write(tmp_path, name, text)
    with pytest.raises(SpecError) as caught:
        read_spec(path)
    assert message in str(caught.value)
    assert str(caught.value).startswith(path)
    assert "\n" not in str(caught.value)


def test_files_that_cannot_be_read(tmp_path: Path) -> None:
    with pytest.raises(SpecError, match=r"gone\.toml: there is no such file"):
        read_spec(str(tmp_path / "gone.toml"))
    with pytest.raises(SpecError, match=r"a\\nb\.toml: there is no such file"):
        read_spec(str(tmp_path / "a\nb.toml"))
    with pytest.raises(SpecError, match="this is a directory: name a spec file in it"):
        read_spec(str(tmp_path))
    folder = tmp_path / "folder.toml"
    folder.mkdir()
    with pytest.raises(SpecError, match=r"folder\.toml: this is a directory"):
        read_spec(str(folder))
    with pytest.raises(SpecError, match="cannot be read: Not a directory"):
        read_spec(write(tmp_path, "a.toml", TOML) + "/b.toml")
    with pytest.raises(SpecError, match="cannot be read: the name is not one of a file"):
        read_spec("a\0.toml")
    with pytest.raises(
        SpecError, match="--from 'xml' is unknown: toml, cnf, pla, blif, bench, aiger or bristol are known"
    ):
        read_spec(write(tmp_path, "a.toml", TOML), from_format="xml")


def test_the_spec_of_the_command_line() -> None:
    spec = inline_spec(
        "a * k == 12 and all(cell[i] != cell[j] for i, j in edges)",
        ["a=4", "k=3s", "cell=2x2", "s=2sx1", "t=2x1s"],
        ["edges=[[0, 1]]", "on=true"],
        "a != 0",
    )
    assert spec.inputs == (
        Word("a", 4),
        Word("k", 3, signed=True),
        Word("cell", 2, count=2),
        Word("s", 2, True, 1),
        Word("t", 2, True, 1),
    )
    assert spec.constants == {"edges": [[0, 1]], "on": True}
    assert spec.domain == "a != 0"
    assert spec.source == "command line"


def test_the_command_line_keeps_the_bit_order() -> None:
    function = understand(inline_spec("a == 4", ["a=3"], [], None)).function
    assert np.flatnonzero(unpack(function.values[0], 3)).tolist() == [4]
