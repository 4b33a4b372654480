"""The floors of the house: who may import whom.

Reads the import statements, runs nothing.  FLOORS is the only place where the
order is written down; ``DEVELOPERS.md`` quotes it.
"""

import ast
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
PACKAGE = ROOT / "contingency"

GROUND = {"errors", "version"}
SIMULATION = GROUND | {"quantities", "estimate", "simulation"}
STUDY = SIMULATION | {"setting", "assurance", "tracking", "results", "study"}

FLOORS = {
    "errors": set(),
    "version": set(),
    "quantities": {"errors"},
    "estimate": GROUND | {"quantities"},
    "simulation": GROUND | {"quantities", "estimate"},
    "setting": SIMULATION,
    "assurance": SIMULATION | {"setting"},
    "tracking": SIMULATION | {"setting"},
    "results": SIMULATION | {"setting", "assurance", "tracking"},
    "study": STUDY - {"study"},
    "report": STUDY,
    "record": GROUND,
    "issued": STUDY | {"report", "record"},
    "verify": STUDY | {"report", "record", "issued"},
    "publish": STUDY | {"report"},
    "office": STUDY | {"report", "record", "issued", "verify", "publish"},
    "cli": STUDY | {"report", "record", "issued", "verify", "publish", "office"},
    "__main__": {"cli"},
}

QUANTITIES_MAY_USE = {"numpy", "scipy"}
"""Arrays in, arrays out: no other library below the nouns."""


def imports_of(path: Path) -> set[str]:
    """Full names of all modules that the file at `path` imports, anywhere in it."""
    found = set()
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            found |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom):
            module = "." * node.level + (node.module or "")
            if module in {"contingency", "."}:
                found |= {f"{module}.{alias.name}" for alias in node.names}
            else:
                found.add(module)
    return found


def faults_of(path: Path, room: str) -> list[str]:
    """What the imports of the file at `path` break, if it lies in `room`."""
    faults = []
    for name in sorted(imports_of(path)):
        if name.startswith("."):
            faults.append(f"{name}: relative import; write the full name")
        elif name == "contingency":
            faults.append("the package root is never imported from within")
        elif name.startswith("contingency."):
            other = name.split(".")[1]
            if other not in FLOORS[room] | {room}:
                faults.append(f"{room} must not import {name}")
    return faults


def room_of(path: Path) -> str:
    """The room that the file at `path` lies in: a folder or a module of the top."""
    return path.relative_to(PACKAGE).with_suffix("").parts[0]


MODULES = sorted(PACKAGE.rglob("*.py"))
"""All modules but the root, which passes public names on and holds none."""
MODULES.remove(PACKAGE / "__init__.py")


@pytest.mark.parametrize("path", MODULES, ids=lambda p: str(p.relative_to(PACKAGE)))
def test_a_module_imports_only_from_its_own_floor_or_below(path):
    """No module reaches up, sideways to a closed floor, or to the package root."""
    assert faults_of(path, room_of(path)) == []


@pytest.mark.parametrize(
    ("room", "line", "fault"),
    [
        ("quantities", "import contingency.estimate.nouns", "must not import"),
        ("setting", "from contingency.assurance import findings", "must not import"),
        ("assurance", "from contingency.tracking import bridge", "must not import"),
        ("record", "from contingency.study import Study", "must not import"),
        ("report", "from contingency import read_estimate", "must not import"),
        ("study", "import contingency", "never imported from within"),
        ("cli", "from .study import Study", "relative import"),
    ],
)
def test_a_wrong_import_is_noticed(room, line, fault, tmp_path):
    """The check above can fail: also inside a function, also under TYPE_CHECKING."""
    path = tmp_path / "wrong.py"
    path.write_text(f"def late():\n    {line}\n", encoding="utf-8")

    assert any(fault in found for found in faults_of(path, room))


def test_every_room_has_its_floor():
    """A new folder or module gets a line in the table before it is used."""
    assert {room_of(path) for path in MODULES} <= set(FLOORS)


@pytest.mark.parametrize(
    "path",
    [path for path in MODULES if room_of(path) == "quantities"],
    ids=lambda p: p.name,
)
def test_quantities_know_arrays_only(path):
    """No pydantic, no pandas, no files: the lowest room can be lifted out whole."""
    outside = {name.split(".")[0] for name in imports_of(path)}

    assert outside - sys.stdlib_module_names - {"contingency"} <= QUANTITIES_MAY_USE
