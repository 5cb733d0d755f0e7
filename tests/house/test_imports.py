"""Which room may import which, and which library: the table of DEVELOPERS.md, held against the code."""

from __future__ import annotations

import ast
import sys
from pathlib import Path

import pytest

STUDY = Path(__file__).parents[2] / "study"
FOUNDATION = {"issues", "units", "limits", "resources"}
ALLOWED: dict[str, set[str]] = {
    "issues": set(),
    "units": set(),
    "limits": set(),
    "resources": set(),
    "results": {"results"},
    "formulas": {"formulas", "units", "issues", "resources"},
    "model": {"model", "issues", "units"},
    "workbook": {"workbook", "model", "formulas", "limits", "issues", "units", "resources"},
    "network": {"network", "model", "formulas", "issues", "units"},
    "analyses": {"analyses", "network", "model", "formulas", "results", "issues", "units"},
    "checks": {"checks", "results", "model", "units", "limits"},
    "report": {"report", "checks", "results", "model", "units", "workbook", "resources", "limits", "issues"},
}
LIBRARIES: dict[str, set[str]] = {
    "issues": set(),
    "units": set(),
    "limits": set(),
    "resources": set(),
    "results": {"numpy"},
    "formulas": {"numpy", "scipy"},
    "model": set(),
    "workbook": {"xlsxwriter"},
    "network": {"numpy", "scipy", "numba"},
    "network/solver": {"numpy", "scipy", "pandapower", "pandas"},
    "analyses": {"numpy", "scipy", "numba"},
    "checks": {"numpy"},
    "report": {"jinja2", "matplotlib", "xlsxwriter", "numpy", "markupsafe"},
}
FREE = {"pipeline", "cli", "__main__", "__init__"}
SUBJECTS_APART = "analyses"


def _modules() -> list[Path]:
    return sorted(STUDY.rglob("*.py"))


def _room(path: Path) -> str:
    relative = path.relative_to(STUDY)
    return relative.parts[0] if len(relative.parts) > 1 else relative.stem


def _imports(path: Path) -> set[str]:
    names: set[str] = set()
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            names |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path}: relative import"
            names.add(node.module or "")
            if node.module == "study":
                names |= {f"study.{alias.name}" for alias in node.names}
    return names - {"study"}


def _libraries_of(path: Path) -> set[str]:
    room = _room(path)
    if room == "network" and path.stem.startswith("solver"):
        return LIBRARIES["network/solver"]
    return LIBRARIES[room]


@pytest.mark.parametrize("path", _modules(), ids=lambda p: str(p.relative_to(STUDY)))
def test_a_module_imports_only_what_its_room_may(path: Path) -> None:
    room = _room(path)
    if room in FREE:
        return
    for name in _imports(path):
        parts = name.split(".")
        if parts[0] == "study":
            assert parts[1] in ALLOWED[room], f"{path.name} in {room} imports {name}"
        elif parts[0] not in sys.stdlib_module_names:
            assert parts[0] in _libraries_of(path), f"{path.name} in {room} imports {name}"


def test_pandapower_is_imported_in_the_solver_alone() -> None:
    users = [p.stem for p in _modules() if any(n.split(".")[0] == "pandapower" for n in _imports(p))]
    assert all(stem.startswith("solver") for stem in users)


def test_no_room_is_called_a_drawer() -> None:
    drawers = {"utils", "helpers", "common", "base", "misc"}
    assert not [p for p in _modules() if p.stem in drawers or p.parent.name in drawers]


def test_the_top_level_holds_the_frame_and_nothing_else() -> None:
    frame = {"README.md", "DEVELOPERS.md", "pyproject.toml", "study", "templates", "tests", "workbooks"}
    visible = {p.name for p in STUDY.parent.iterdir() if not p.name.startswith(".")}
    assert visible - {"dist", "build", "out"} <= frame
