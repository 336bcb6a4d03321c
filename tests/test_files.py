"""Files are written whole or not at all."""

from __future__ import annotations

import os
import stat
import threading
from pathlib import Path

import pytest

from revsynth.errors import UsageError
from revsynth.files import write_whole


def test_a_file_is_written_and_replaced(tmp_path: Path) -> None:
    place = tmp_path / "a.qasm"
    write_whole(place, b"one")
    place.chmod(0o640)
    write_whole(place, b"two")
    assert place.read_bytes() == b"two"
    assert stat.S_IMODE(place.stat().st_mode) == 0o640
    assert os.listdir(tmp_path) == ["a.qasm"]


def test_a_failing_check_leaves_the_old_file_and_nothing_else(tmp_path: Path) -> None:
    place = tmp_path / "a.qasm"
    place.write_bytes(b"old")

    def object_to(data: bytes) -> None:
        assert data == b"new"
        raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        write_whole(place, b"new", object_to)
    assert place.read_bytes() == b"old"
    assert os.listdir(tmp_path) == ["a.qasm"]


def test_a_symbolic_link_keeps_pointing_where_it_did(tmp_path: Path) -> None:
    real, link = tmp_path / "real.qasm", tmp_path / "link.qasm"
    real.write_bytes(b"old")
    link.symlink_to(real)
    write_whole(link, b"new")
    assert link.is_symlink()
    assert real.read_bytes() == b"new"


def test_devices_and_pipes_are_written_directly(tmp_path: Path) -> None:
    write_whole("/dev/null", b"gone")
    assert not Path("/dev/null").is_file()
    pipe = tmp_path / "pipe"
    os.mkfifo(pipe)
    got: list[bytes] = []
    reader = threading.Thread(target=lambda: got.append(pipe.read_bytes()))
    reader.start()
    write_whole(pipe, b"through")
    reader.join()
    assert got == [b"through"]
    assert os.listdir(tmp_path) == ["pipe"]


@pytest.mark.parametrize(
    ("name", "reason"),
    [("", "is a folder"), ("missing/a.qasm", "cannot be written: No such file or directory")],
)
def test_a_place_that_cannot_be_written_is_one_line(tmp_path: Path, name: str, reason: str) -> None:
    with pytest.raises(UsageError, match=reason) as caught:
        write_whole(tmp_path / name, b"x")
    assert "\n" not in str(caught.value)
