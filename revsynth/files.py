"""Writing results: whole or not at all.

A regular file is written beside its place and renamed; pipes, devices and the like are written directly.
"""

from __future__ import annotations

import contextlib
import os
import stat
import tempfile
from collections.abc import Callable
from pathlib import Path

from revsynth.errors import UsageError


def write_whole(path: str | Path, data: bytes, check: Callable[[bytes], None] | None = None) -> None:
    """Write `data` to `path`; `check` sees the bytes read back from the disk before the file takes its name.

    A symbolic link keeps pointing where it did: the file behind it is replaced. Raises UsageError with the
    reason where the place cannot be written; nothing is left behind then, and an old file stays as it was.
    """
    if not str(path):
        raise UsageError("the name of the file to write is empty")
    try:
        if is_regular(path):
            _write_beside(Path(os.path.realpath(path)), data, check)
            return
        if os.path.isdir(path):
            raise UsageError(f"{path}: is a folder; name a file to write")
        with open(path, "wb") as stream:
            stream.write(data)
    except OSError as error:
        raise UsageError(f"{path}: cannot be written: {error.strerror or error}") from None


def is_regular(path: str | Path) -> bool:
    """Whether a regular file is there or would be made there: no folder, device or pipe.

    Raises OSError where the place cannot be looked at.
    """
    try:
        return stat.S_ISREG(os.stat(path).st_mode)
    except FileNotFoundError:
        return True


def _write_beside(place: Path, data: bytes, check: Callable[[bytes], None] | None) -> None:
    handle, beside = tempfile.mkstemp(prefix=f".{place.name}.", dir=place.parent)
    try:
        with os.fdopen(handle, "wb") as stream:
            stream.write(data)
            stream.flush()
            os.fsync(stream.fileno())
        if check is not None:
            check(Path(beside).read_bytes())
        os.chmod(beside, stat.S_IMODE(place.stat().st_mode) if place.exists() else 0o666 & ~_umask())
        os.replace(beside, place)
    except BaseException:
        with contextlib.suppress(FileNotFoundError):
            os.unlink(beside)
        raise


def _umask() -> int:
    mask = os.umask(0)
    os.umask(mask)
    return mask
