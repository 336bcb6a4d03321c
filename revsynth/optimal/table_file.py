"""The table of classes in the user's cache folder: written whole, checked whole before it is believed.

The folder is `revsynth` in the one that the environment variable XDG_CACHE_HOME names, or in `~/.cache`
(XDG Base Directory Specification 0.8, freedesktop.org: a relative path counts as absent).

A file is one line of ASCII, `revsynth classes of 4 lines, version 1, size S, B bytes, blake2b HEX`, and then
for each size 0 ... S the differences of the ascending smallest words, seven bits a byte, lowest first.
"""

from __future__ import annotations

import contextlib
import hashlib
import os
import re
import tempfile
from itertools import pairwise
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from revsynth.optimal.classes import COUNTS, MOST_SIZE, Classes, Progress, found_classes

VERSION = 1
_HEADER = re.compile(
    rb"revsynth classes of 4 lines, version (\d+), size (\d), (\d{1,12}) bytes, blake2b ([0-9a-f]{64})\n"
)
_LONGEST_HEADER = 200
_MOST_BYTES = 10
"""Seven bits a byte: a word of 64 bits takes up to ten."""


class _UnusableError(Exception):
    """The file is not one of ours, or not whole."""


def cache_folder() -> Path | None:
    """Where tables are kept; None where no home folder is known. It need not exist yet."""
    named = os.environ.get("XDG_CACHE_HOME", "")
    if named and Path(named).is_absolute():
        return Path(named) / "revsynth"
    try:
        return Path.home() / ".cache" / "revsynth"
    except RuntimeError:
        return None


def is_kept(size: int, folder: Path | None = None) -> bool:
    """Whether a file for the table is there, whatever is in it."""
    folder = folder or cache_folder()
    return folder is not None and (folder / file_name(size)).is_file()


def file_name(size: int) -> str:
    """The name of the file for the table up to a size."""
    return f"classes-4-lines-size-{size}.table"


def classes_up_to(size: int, progress: Progress, folder: Path | None = None) -> Classes:
    """The table from the folder, or found anew and put there; a damaged or foreign file is replaced.

    Builders at the same time do the work twice and each puts a whole file in place. Where nothing can be
    written the table is used all the same, and `progress` says so. Raises ValueError beyond size 7.
    """
    if not 0 <= size <= MOST_SIZE:
        raise ValueError(f"classes are counted up to size {MOST_SIZE}, not {size}")
    folder = folder or cache_folder()
    path = None if folder is None else folder / file_name(size)
    if path is not None and path.exists():
        try:
            return _read(path, size)
        except (_UnusableError, OSError) as error:
            progress(f"optimal: {path}: {error}: finding the table anew")
    smaller = classes_up_to(size - 1, progress, folder) if size > 6 else None
    classes = found_classes(size, progress, smaller)
    if path is not None:
        try:
            _write(path, classes)
        except OSError as error:
            progress(f"optimal: {path}: the table cannot be kept: {error.strerror}")
    return classes


def encoded(classes: Classes) -> bytes:
    """The whole file of a table."""
    from revsynth.optimal.kernels import varint_encoded

    parts: list[bytes] = []
    for level in classes.levels:
        differences = np.diff(level, prepend=np.uint64(0))
        out = np.empty(_MOST_BYTES * len(level), dtype=np.uint8)
        parts.append(out[: int(varint_encoded(differences, out))].tobytes())
    lengths = np.array([len(part) for part in parts], dtype="<u8").tobytes()
    body = b"".join([lengths, *parts])
    digest = hashlib.blake2b(body, digest_size=32).hexdigest()
    head = (
        f"revsynth classes of 4 lines, version {VERSION}, size {classes.size}, {len(body)} bytes, "
        f"blake2b {digest}\n"
    )
    return head.encode() + body


def decoded(data: bytes, size: int) -> Classes:
    """The table of a file; raises ValueError with the reason where it is not one, or not of this size."""
    try:
        return _decoded(data, size)
    except _UnusableError as error:
        raise ValueError(str(error)) from None


def _read(path: Path, size: int) -> Classes:
    with path.open("rb") as file:
        head = file.read(_LONGEST_HEADER)
        _check_head(head, size)
        return _decoded(head + file.read(), size)


def _check_head(data: bytes, size: int) -> re.Match[bytes]:
    head = _HEADER.match(data)
    if head is None:
        raise _UnusableError("not a table of revsynth")
    if int(head[1]) != VERSION:
        raise _UnusableError(f"version {int(head[1])} instead of {VERSION}")
    if int(head[2]) != size:
        raise _UnusableError(f"a table up to size {int(head[2])} instead of {size}")
    return head


def _decoded(data: bytes, size: int) -> Classes:
    from revsynth.optimal.kernels import varint_decoded

    head = _check_head(data, size)
    body = memoryview(data)[head.end() :]
    if len(body) != int(head[3]):
        raise _UnusableError(f"{len(body)} bytes instead of {int(head[3])}")
    if hashlib.blake2b(body, digest_size=32).hexdigest().encode() != head[4]:
        raise _UnusableError("the checksum does not agree")
    index = 8 * (size + 1)
    bounds = [index]
    for length in np.frombuffer(body[:index], dtype="<u8").tolist():
        bounds.append(bounds[-1] + length)
    if len(body) < index or bounds[-1] != len(body):
        raise _UnusableError("the lengths of its parts do not agree")
    bytes_: NDArray[np.uint8] = np.frombuffer(body, dtype=np.uint8)
    levels = []
    for count, (begin, end) in zip(COUNTS, pairwise(bounds), strict=False):
        level = np.empty(count, dtype=np.uint64)
        if not varint_decoded(bytes_[begin:end], level) or np.any(level[1:] <= level[:-1]):
            raise _UnusableError("its words do not ascend")
        levels.append(level)
    return Classes(tuple(levels))


def _write(path: Path, classes: Classes) -> None:
    """Written beside and renamed, so that a reader finds a whole file or none."""
    path.parent.mkdir(parents=True, exist_ok=True, mode=0o700)
    handle, beside = tempfile.mkstemp(prefix=path.name, suffix=".part", dir=path.parent)
    try:
        with os.fdopen(handle, "wb") as file:
            file.write(encoded(classes))
        os.replace(beside, path)
    except BaseException:
        with contextlib.suppress(OSError):
            os.unlink(beside)
        raise
