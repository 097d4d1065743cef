"""Data flows one way: each room imports only from rooms to its left."""

from __future__ import annotations

import ast
from graphlib import TopologicalSorter
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
ROOMS = (
    "weather", "collector.physics", "collector.build", "collector.balance", "collector.plant", "collector.study",
    "collector.show", "collector.cli",
)  # fmt: skip
MODULES = sorted(path for package in ("weather", "collector") for path in (ROOT / package).rglob("*.py"))


def room_of(module: str) -> str | None:
    return next((room for room in ROOMS if module == room or module.startswith(room + ".")), None)


def name_of(path: Path) -> str:
    parts = path.relative_to(ROOT).with_suffix("").parts
    return ".".join(parts[:-1] if parts[-1] == "__init__" else parts)


def imports_of(path: Path, *, at_load: bool = False) -> set[str]:
    """Modules that a file imports; inside functions too, unless only those at load are asked for."""
    tree = ast.parse(path.read_text(encoding="utf-8"))
    nodes = tree.body if at_load else list(ast.walk(tree))
    found = {alias.name for node in nodes if isinstance(node, ast.Import) for alias in node.names}
    return found | {str(node.module) for node in nodes if isinstance(node, ast.ImportFrom)}


@pytest.mark.parametrize("path", MODULES, ids=name_of)
def test_no_arrow_points_backward(path):
    here = room_of(name_of(path))
    for module in imports_of(path):
        there = room_of(module)
        if here and there:
            assert ROOMS.index(there) <= ROOMS.index(here), f"{name_of(path)} imports {module}"


def test_no_cycle_between_modules():
    names = {name_of(path) for path in MODULES}
    graph = {name_of(path): {module for module in imports_of(path) if module in names} for path in MODULES}
    assert len(list(TopologicalSorter(graph).static_order())) >= len(MODULES)


def test_every_module_has_a_room():
    homeless = [name_of(path) for path in MODULES if room_of(name_of(path)) is None and name_of(path) != "collector"]
    assert homeless == []


def test_the_command_line_loads_click_alone():
    outside = {module.split(".")[0] for module in imports_of(ROOT / "collector" / "cli.py", at_load=True)}
    assert outside - {"__future__", "sys", "collections", "pathlib", "typing"} == {"click"}


def test_physics_reads_no_file_and_no_scenario():
    for path in MODULES:
        if room_of(name_of(path)) == "collector.physics":
            assert not imports_of(path) & {"tomllib", "json", "pathlib", "csv", "pydantic", "pandas", "pvlib"}


def test_the_top_level_is_the_agreed_one():
    seen = {
        path.name for path in ROOT.iterdir() if not path.name.startswith(".") and not path.name.endswith(".egg-info")
    }
    allowed = {
        "README.md", "DEVELOPERS.md", "pyproject.toml", "collector", "weather", "tests", "scenarios", "LICENSE",
        "CHANGELOG.md", "out", "build",
    }  # fmt: skip
    assert seen <= allowed
