"""A module imports only what stands before it in the list of DEVELOPERS.md; a library is known to its owners only."""

from __future__ import annotations

import ast
import re
import sys
from functools import cache
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
FILES = sorted([*(ROOT / "engine").rglob("*.py"), *(ROOT / "app").rglob("*.py")])
ENGINE = [path for path in FILES if ROOT / "engine" in path.parents]
APP = [path for path in FILES if ROOT / "app" in path.parents]

LIBRARIES = {
    **{name: {"engine", "app"} for name in ("numpy", "scipy", "pandas", "pydantic", "pydantic_core")},
    "CoolProp": {"engine.fluids"},
    "iapws": {"engine.proofs"},
    "reportlab": {"engine.report"},
    "openpyxl": {"engine.readings", "engine.sheet"},
    "streamlit": {"app"},
    "plotly": {"app"},
}
"""Third-party package to those that may import it."""


def name_of(path: Path) -> str:
    return ".".join(path.relative_to(ROOT).with_suffix("").parts).removesuffix(".__init__")


@cache
def imported(path: Path) -> tuple[str, ...]:
    """Dotted names of all that a file imports, at its top or within its functions."""
    found: list[str] = []
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            found += [alias.name for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path}: relative imports hide what is imported"
            base = node.module or ""
            part = ROOT.joinpath(*base.split("."))
            for alias in node.names:
                module = part.joinpath(alias.name)
                is_module = module.with_suffix(".py").exists() or (module / "__init__.py").exists()
                found.append(f"{base}.{alias.name}" if is_module else base)
    return tuple(found)


def names_taken_from_the_door(path: Path) -> set[str]:
    """What a file takes from the engine's own __init__, which resolves the rest when it is asked."""
    taken = set()
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.ImportFrom) and node.module == "engine":
            taken |= {alias.name for alias in node.names if f"engine.{alias.name}" not in imported(path)}
        elif isinstance(node, ast.Import) and "engine" in {alias.name for alias in node.names}:
            taken.add("*")
    return taken


@cache
def layers() -> dict[str, int]:
    """Module of the engine to the place of its layer, from the guide for contributors."""
    text = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
    found = re.search(r"^units < stated <.*?(?=\.\s)", text, re.MULTILINE | re.DOTALL)
    assert found, "DEVELOPERS.md states no list of imports"
    plain = found[0].replace("`engine` (the door)", "engine.__init__").replace("`", "")
    names = [[name.strip().removeprefix("engine.") for name in layer.split(",")] for layer in plain.split("<")]
    return {name: place for place, layer in enumerate(names) for name in layer}


def layer_of(module: str) -> str:
    """engine.exchangers.double_pipe is of exchangers; engine itself is the door."""
    return module.split(".")[1] if "." in module else "__init__"


def test_the_list_names_every_module_of_the_engine():
    assert {layer_of(name_of(path)) for path in ENGINE} - layers().keys() == set()


@pytest.mark.parametrize("path", ENGINE, ids=name_of)
def test_a_module_imports_only_what_stands_before_it(path):
    own = layer_of(name_of(path))
    others = {layer_of(name) for name in imported(path) if name.split(".")[0] == "engine"} - {own}
    if names_taken_from_the_door(path) <= {"__version__"}:
        others -= {"__init__"}
    assert [other for other in others if layers()[other] >= layers()[own]] == []
    assert "app" not in {name.split(".")[0] for name in imported(path)}


@pytest.mark.parametrize("path", FILES, ids=name_of)
def test_a_library_is_known_to_its_owners_only(path):
    module = name_of(path)
    for library in {name.split(".")[0] for name in imported(path)} - {"engine", "app"} - sys.stdlib_module_names:
        assert library in LIBRARIES, f"{module} imports {library}, which is on no list"
        assert any(f"{module}.".startswith(f"{owner}.") for owner in LIBRARIES[library]), f"{module} imports {library}"


@pytest.mark.parametrize("path", [path for path in ENGINE if path.parent.name == "correlations"], ids=name_of)
def test_correlations_know_numpy_and_nothing_else(path):
    tops = {name.split(".")[0] for name in imported(path)} - sys.stdlib_module_names
    assert tops <= {"numpy", "engine"}
    assert {name for name in imported(path) if name.startswith("engine")} <= {
        name_of(other) for other in ENGINE if other.parent.name == "correlations"
    }


@pytest.mark.parametrize("path", APP, ids=name_of)
def test_the_app_enters_by_the_door(path):
    import engine

    of_engine = {name for name in imported(path) if name.split(".")[0] == "engine"}
    assert of_engine <= {"engine"}
    tree = ast.parse(path.read_text(encoding="utf-8"))
    used = {
        node.attr
        for node in ast.walk(tree)
        if isinstance(node, ast.Attribute) and isinstance(node.value, ast.Name) and node.value.id == "engine"
    }
    assert used - set(engine.__all__) == set()


def test_everything_behind_the_door_is_there():
    import engine

    assert all(getattr(engine, name) is not None for name in engine.__all__)
    with pytest.raises(AttributeError, match="it offers"):
        _ = engine.nothing


def test_requirements_pin_every_library():
    pinned = {
        line.partition("==")[0].lower()
        for line in (ROOT / "requirements.txt").read_text(encoding="utf-8").splitlines()
        if line and not line.startswith("#")
    }
    assert {library.lower() for library in LIBRARIES} - {"pydantic_core"} <= pinned


@pytest.mark.parametrize("path", APP, ids=name_of)
def test_a_page_is_short_enough_to_be_read_at_once(path):
    assert len(path.read_text(encoding="utf-8").splitlines()) <= 520
