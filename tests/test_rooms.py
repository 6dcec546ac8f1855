"""The one direction of flow: each room imports only from rooms before it."""

from __future__ import annotations

import ast
from pathlib import Path

import lasescatter

PACKAGE = Path(lasescatter.__file__).parent

# What each room may import of the package, besides itself.
SHARED = {"matter", "scene", "problems", "assumptions", "rules", "cautions", "standard_atmosphere"}
MAY_IMPORT = {
    "matter": set(),
    "scene": {"matter"},
    "problems": set(),
    "assumptions": set(),
    "rules": set(),
    "cautions": {"rules"},
    "standard_atmosphere": set(),
    "units": {"problems"},
    "site": {"units"} | SHARED,
    "optics": SHARED,
    "medium": {"optics"} | SHARED,
    "exposure": {"optics", "medium"} | SHARED,
    "limits": SHARED,
    "assessment": {"optics", "medium", "exposure", "limits"} | SHARED,
    "report": {"assessment", "limits", "units"} | SHARED,
    "commands": {"site", "assessment", "limits", "report", "units"} | SHARED,
    "__main__": {"commands"},
    "__init__": set(),
}


def imports_of(file: Path) -> set[str]:
    """Rooms of the package that a file imports, at any depth of its code."""
    found = set()
    for node in ast.walk(ast.parse(file.read_text(encoding="utf-8"))):
        names = []
        if isinstance(node, ast.Import):
            names = [alias.name for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{file}: imports are absolute here"
            whole = node.module == "lasescatter"
            names = [f"{node.module}.{alias.name}" for alias in node.names] if whole else [node.module]
        found |= {name.split(".")[1] for name in names if name and name.startswith("lasescatter.")}
    return found


def room_of(file: Path) -> str:
    relative = file.relative_to(PACKAGE)
    return relative.parts[0] if len(relative.parts) > 1 else relative.stem


def test_each_room_imports_only_from_rooms_before_it():
    files = sorted(PACKAGE.rglob("*.py"))
    assert len(files) > 30
    wrong = []
    for file in files:
        room = room_of(file)
        rooms = {path.stem if path.is_file() else path.name for path in PACKAGE.iterdir()}
        for other in imports_of(file) & rooms - {room}:
            if other not in MAY_IMPORT[room]:
                wrong.append(f"{file.relative_to(PACKAGE)} imports {other}")
    assert not wrong, "\n".join(wrong)


def test_only_units_knows_the_unit_library():
    users = [file.name for file in PACKAGE.rglob("*.py") if "import pint" in file.read_text(encoding="utf-8")]
    assert users == ["units.py"]


def test_nothing_is_evaluated():
    for file in PACKAGE.rglob("*.py"):
        calls = {node.func.id for node in ast.walk(ast.parse(file.read_text(encoding="utf-8")))
                 if isinstance(node, ast.Call) and isinstance(node.func, ast.Name)}  # fmt: skip
        assert not calls & {"eval", "exec", "compile", "__import__"}, file
