"""Audit of the table of outside checks: each names a test that exists, and every law, material value and limit has one."""

from __future__ import annotations

import ast
import importlib
import inspect
import pkgutil
import tomllib
from collections.abc import Iterator
from functools import cache
from pathlib import Path
from types import ModuleType
from typing import Any

import pytest

from planner import chapters, physics
from planner.declare import Law, law_of
from planner.graph import graph

ROOT = Path(__file__).parents[1]
TABLE = tomllib.loads((ROOT / "tests/data/checks.toml").read_text("utf-8"))
CHECKS: list[dict[str, Any]] = TABLE["check"]
MATERIALS = tomllib.loads((ROOT / "planner/data/materials.toml").read_text("utf-8"))
OUTSIDE = {"standard", "handbook", "paper", "reference library", "common practice", "from memory"}
ARITHMETIC = "plain arithmetic"


def laws() -> dict[str, Law]:
    modules = [m for package in (physics, chapters) for m in _modules(package)]
    return {
        f"{module.__name__.rpartition('.')[2]}.{name}": law_of(member)
        for module in modules
        for name, member in inspect.getmembers(module, inspect.isfunction)
        if hasattr(member, "law") and member.__module__ == module.__name__
    }


def _modules(package: ModuleType) -> Iterator[ModuleType]:
    for found in pkgutil.iter_modules(package.__path__):
        yield importlib.import_module(f"{package.__name__}.{found.name}")


def material_values() -> set[str]:
    """Every value that the data states; one taken over from a base is stated there."""
    found = {f"isotope {name}" for name in MATERIALS["isotope"]}
    for name, entry in MATERIALS["material"].items():
        found |= {f"{name} {key}" for key in entry.get("values", {})}
        found |= {f"{name} {nucleus['isotope']} coupling" for nucleus in entry.get("nuclei", [])}
        found |= {f"{name} barrier coupling"} if "barrier" in entry else set()
    return found


def limits() -> set[str]:
    return {limit.name for limit in graph().limits}


def checked(*kinds: str) -> set[str]:
    return {what for check in CHECKS if not kinds or check["kind"] in kinds for what in check["what"]}


@cache
def names_in(path: str) -> set[str]:
    tree = ast.parse((ROOT / path).read_text("utf-8"))
    return {node.name for node in tree.body if isinstance(node, ast.FunctionDef)}


@pytest.mark.parametrize("test", sorted({check["test"] for check in CHECKS}))
def test_the_test_of_a_check_exists(test: str) -> None:
    path, _, name = test.partition("::")
    assert name.startswith("test_")
    assert name in names_in(path)


def test_a_check_says_against_what_and_of_which_kind() -> None:
    for check in CHECKS:
        assert set(check) == {"kind", "source", "test", "what"}, check
        assert check["kind"] in OUTSIDE | {ARITHMETIC}, check
        assert check["source"], check
        assert "regression" not in check["source"], check


def test_nothing_is_listed_that_does_not_exist() -> None:
    assert checked() <= set(laws()) | material_values() | limits()


def test_every_law_is_checked() -> None:
    assert set(laws()) - checked() == set()


def test_published_laws_without_a_check_from_outside_are_exactly_those_that_the_table_admits() -> None:
    published = {name for name, law in laws().items() if law.reference != "definition"}
    assert sorted(published - checked(*OUTSIDE)) == TABLE["arithmetic_only"]


def test_every_material_value_is_checked() -> None:
    assert material_values() - checked() == set()


def test_every_limit_is_checked() -> None:
    assert limits() - checked() == set()
