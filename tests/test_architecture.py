"""The arrows between the rooms: who may import whom, checked from the source."""

from __future__ import annotations

import ast
import subprocess
import sys
from pathlib import Path

import pytest

PACKAGE = Path(__file__).parent.parent / "revsynth"

FORBIDDEN = {
    "spec": {
        "circuit",
        "cascade",
        "synthesis",
        "reduction",
        "lowering",
        "qasm",
        "verification",
        "report",
        "cli",
    },
    "logic": {
        "circuit",
        "cascade",
        "synthesis",
        "reduction",
        "lowering",
        "qasm",
        "verification",
        "report",
        "cli",
    },
    "elaborate": {
        "circuit",
        "embed",
        "cascade",
        "synthesis",
        "reduction",
        "lowering",
        "qasm",
        "verification",
        "report",
        "cli",
    },
    "embed": {
        "circuit",
        "synthesis.transform",
        "reduction",
        "lowering",
        "qasm",
        "verification",
        "report",
        "cli",
    },
    "cascade": {
        "circuit",
        "synthesis",
        "reduction",
        "lowering",
        "qasm",
        "verification",
        "report.circuit_svg",
        "report.terminal",
        "report.export",
        "cli",
        "spec",
    },
    "synthesis": {
        "circuit",
        "elaborate",
        "reduction",
        "lowering",
        "qasm",
        "verification",
        "report",
        "cli",
        "spec",
    },
    "reduction": {
        "circuit",
        "synthesis",
        "lowering",
        "qasm",
        "verification",
        "report",
        "cli",
        "spec",
        "embed",
    },
    "optimal": {
        "circuit",
        "embed",
        "synthesis",
        "reduction",
        "lowering",
        "qasm",
        "verification",
        "report",
        "cli",
        "spec",
        "elaborate",
    },
    "lowering": {"spec", "elaborate", "reduction", "qasm", "verification", "report", "cli", "embed"},
    "circuit": {
        "spec",
        "cascade",
        "synthesis",
        "reduction",
        "lowering",
        "qasm",
        "verification",
        "report.terminal",
        "report.export",
        "cli",
    },
    "qasm": {
        "spec",
        "elaborate",
        "cascade",
        "synthesis",
        "reduction",
        "lowering",
        "verification",
        "report",
        "cli",
    },
    "verification": {
        "cascade",
        "elaborate",
        "synthesis",
        "reduction",
        "lowering",
        "embed",
        "optimal",
        "report",
        "cli",
        "logic.network",
        "logic.network_builder",
        "logic.network_function",
        "logic.equivalence",
        "logic.and_reduction",
        "logic.tables",
        "logic.clauses",
        "logic.affine_classes",
    },
    "verification/lifting": {
        "spec",
        "logic",
        "elaborate",
        "cascade",
        "synthesis",
        "reduction",
        "lowering",
        "embed",
        "qasm",
        "report",
        "cli",
    },
    "report": {"spec", "synthesis", "reduction", "lowering", "verification", "cli"},
}


def imported(path: Path) -> set[str]:
    """Modules of revsynth that a file imports, anywhere in it but under TYPE_CHECKING too."""
    found = set()
    for node in ast.walk(ast.parse(path.read_text())):
        if isinstance(node, ast.ImportFrom) and node.module and node.module.startswith("revsynth"):
            found.add(node.module)
            found.update(f"{node.module}.{alias.name}" for alias in node.names)
        elif isinstance(node, ast.Import):
            found.update(alias.name for alias in node.names if alias.name.startswith("revsynth"))
    return found


@pytest.mark.parametrize("room", sorted(FORBIDDEN))
def test_a_room_imports_nothing_it_should_not_know(room: str) -> None:
    files = sorted((PACKAGE / room).rglob("*.py"))
    assert files
    for path in files:
        for module in imported(path):
            for other in FORBIDDEN[room]:
                prefix = f"revsynth.{other}"
                crosses = module == prefix or module.startswith(prefix + ".")
                assert not crosses, f"{path.name} imports {module}"


@pytest.mark.parametrize(
    ("library", "owner"), [("pyeda", {"spec/pyeda_adapter.py"}), ("pysat", {"solver.py"})]
)
def test_one_module_imports_a_library_with_traps(library: str, owner: set[str]) -> None:
    users = {
        str(path.relative_to(PACKAGE))
        for path in PACKAGE.rglob("*.py")
        for node in ast.walk(ast.parse(path.read_text()))
        if (isinstance(node, ast.ImportFrom) and (node.module or "").split(".")[0] == library)
        or (isinstance(node, ast.Import) and any(a.name.split(".")[0] == library for a in node.names))
    }
    assert users == owner


def test_help_imports_neither_numpy_nor_anything_heavier() -> None:
    script = (
        "import sys; from revsynth.cli.main import main; status = main(['--help']); "
        "heavy = {'numpy', 'numba', 'pyeda', 'reportlab'} & set(sys.modules); sys.exit(status or len(heavy))"
    )
    assert subprocess.run([sys.executable, "-c", script], capture_output=True, check=False).returncode == 0
