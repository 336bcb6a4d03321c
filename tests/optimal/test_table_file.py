"""The table in the cache folder: kept, read back, and replaced where it is damaged or not ours."""

from __future__ import annotations

import multiprocessing
from pathlib import Path

import numpy as np
import pytest

from revsynth.optimal import table_file
from revsynth.optimal.classes import found_classes
from revsynth.optimal.table_file import cache_folder, classes_up_to, decoded, encoded, file_name

SIZE = 3


def silent(_: str) -> None:
    """Says nothing."""


def whole() -> bytes:
    return encoded(found_classes(SIZE, silent))


def refound(folder: Path) -> list[str]:
    """What is said when the table is asked for; it must be right and whole afterwards."""
    said: list[str] = []
    classes = classes_up_to(SIZE, said.append, folder)
    for one, other in zip(classes.levels, found_classes(SIZE, silent).levels, strict=True):
        assert np.array_equal(one, other)
    assert (folder / file_name(SIZE)).read_bytes() == whole()
    assert [path.name for path in folder.iterdir()] == [file_name(SIZE)]
    return said


def test_it_is_found_once_and_read_afterwards(tmp_path: Path) -> None:
    folder = tmp_path / "new" / "folder"
    assert refound(folder)
    assert table_file.is_kept(SIZE, folder)
    assert not table_file.is_kept(SIZE + 1, folder)
    assert refound(folder) == []


def damaged() -> dict[str, bytes]:
    """Files that are not the table, by what is said of them."""
    data = whole()
    head = data.index(b"\n") + 1
    turned = bytearray(data)
    turned[-1] ^= 1
    other_digest = bytearray(data)
    other_digest[head - 2] = ord("0") if data[head - 2] != ord("0") else ord("1")
    return {
        "not a table of revsynth": b"Beacon log, night 3\n",
        "version 2 instead of 1": data.replace(b"version 1", b"version 2"),
        "a table up to size 2 instead of 3": encoded(found_classes(2, silent)),
        f"{len(data) - head - 9} bytes instead of": data[:-9],
        f"{len(data) - head + 1} bytes instead of": data + b"\0",
        "the checksum does not agree": bytes(turned),
        "the checksum does not agree ": bytes(other_digest),
        "not a table of revsynth ": b"",
    }


@pytest.mark.parametrize("reason", sorted(damaged()))
def test_a_damaged_or_foreign_file_is_replaced(tmp_path: Path, reason: str) -> None:
    (tmp_path / file_name(SIZE)).write_bytes(damaged()[reason])
    said = refound(tmp_path)
    assert reason.strip() in said[0]
    assert "finding the table anew" in said[0]


def test_a_file_with_a_right_checksum_and_wrong_words_is_refused(tmp_path: Path) -> None:
    """As a table written by something else would be: one word twice, or a length that is off."""
    classes = found_classes(SIZE, silent)
    classes.levels[3][5] = classes.levels[3][4]
    with pytest.raises(ValueError, match="do not ascend"):
        decoded(encoded(classes), SIZE)
    classes.levels[2][0] += np.uint64(1 << 40)
    (tmp_path / file_name(SIZE)).write_bytes(encoded(classes))
    assert "finding the table anew" in refound(tmp_path)[0]


def test_where_nothing_can_be_written_the_table_is_used_all_the_same(tmp_path: Path) -> None:
    (tmp_path / "taken").write_text("a file, not a folder")
    said: list[str] = []
    assert classes_up_to(2, said.append, tmp_path / "taken" / "deeper").size == 2
    assert "the table cannot be kept" in said[-1]


def test_builders_at_the_same_time_do_not_clash(tmp_path: Path) -> None:
    context = multiprocessing.get_context("spawn")
    with context.Pool(2) as pool:
        sizes = pool.starmap(_ask, [(str(tmp_path),)] * 6)
    assert sizes == [SIZE] * 6
    assert refound(tmp_path) == []


def _ask(folder: str) -> int:
    return classes_up_to(SIZE, silent, Path(folder)).size


def test_the_folder_is_the_one_of_the_standard(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    """XDG Base Directory Specification 0.8, freedesktop.org: relative paths count as absent."""
    monkeypatch.setenv("XDG_CACHE_HOME", str(tmp_path))
    assert cache_folder() == tmp_path / "revsynth"
    monkeypatch.setenv("HOME", str(tmp_path / "home"))
    for absent in ("", "relative/path"):
        monkeypatch.setenv("XDG_CACHE_HOME", absent)
        assert cache_folder() == tmp_path / "home" / ".cache" / "revsynth"


def test_what_is_not_counted_is_refused() -> None:
    with pytest.raises(ValueError, match="up to size 7, not 9"):
        classes_up_to(9, silent)
