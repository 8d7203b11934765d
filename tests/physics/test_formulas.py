"""Every law's formula as it is shown, against the law itself on random numbers.

The expression is evaluated row by row in plain Python with the longest floats there are; it shares nothing with the law.
"""

from __future__ import annotations

import ast
import inspect
import pkgutil
import zlib
from collections.abc import Callable, Iterator
from importlib import import_module
from typing import Any

import numpy as np
import pytest

from planner import chapters, constants, kinds, physics
from planner.declare import law_of
from planner.graph import graph
from planner.views.formula import Formula, constants_read, formula_of, meaning_of
from tests.physics import near

Number = np.longdouble
ROWS = 60
# Ranges of the random numbers (SI), three decades or so around what plans hold, small enough for every branch.
RANGES = {
    kinds.FREQUENCY: (1e3, 1e7), kinds.TIME: (1e-7, 1e-4), kinds.FIELD: (1e-3, 1.0), kinds.FRACTION: (1e-3, 0.3),
    kinds.TEMPERATURE: (0.02, 1.0), kinds.ENERGY: (1e-25, 1e-22), kinds.COUNT: (1.0, 1e3), kinds.ANGLE: (-1.5, 1.5),
    kinds.CHARGE_NOISE: (1e-26, 1e-24), kinds.DISPLACEMENT: (1e12, 1e14), kinds.ENERGY_SQUARED: (1e-51, 1e-48),
    kinds.RATIO: (1e-4, 1e-1),
}  # fmt: skip
# Arguments of three components, by the laws that the graph doesn't wire.
VECTORS = {"direction", "set_vector", "field_response"}
FUNCTIONS: dict[str, Any] = {
    "sqrt": np.sqrt, "exp": np.exp, "log": np.log, "sin": np.sin, "cos": np.cos, "tanh": np.tanh, "pi": Number(np.pi),
    "abs": abs, "min": min, "max": max, "sum": sum, "nan": Number("nan"), "inf": Number("inf"),
    "norm": lambda vector: np.sqrt(sum(each**2 for each in vector)),
    "vector": lambda *components: np.array(components, dtype=Number),
    "unknown": np.isnan,
    "known": lambda *values: next((value for value in values if not np.isnan(value)), Number("nan")),
}  # fmt: skip


def laws() -> Iterator[Callable[..., Any]]:
    """Every law of the package, once."""
    found: dict[str, Callable[..., Any]] = {}
    for package in (physics, chapters):
        for module in pkgutil.iter_modules(package.__path__, package.__name__ + "."):
            for function in vars(import_module(module.name)).values():
                if inspect.isfunction(function) and hasattr(function, "law"):
                    found[f"{function.__module__}.{function.__name__}"] = function
    yield from found.values()


def name_of(function: Callable[..., Any]) -> str:
    return f"{function.__module__.rpartition('.')[2]}.{function.__name__}"


LAWS = sorted(laws(), key=name_of)
CLOSED = [law for law in LAWS if formula_of(law).expression]


def test_the_laws_are_found() -> None:
    assert {name_of(derived.law) for derived in graph().order} <= {name_of(law) for law in LAWS}
    assert len(CLOSED) > len(LAWS) / 2


@pytest.mark.parametrize("law", LAWS, ids=name_of)
def test_a_law_has_a_formula_or_names_its_method(law: Callable[..., Any]) -> None:
    formula = formula_of(law)
    assert bool(formula.expression) != (len(formula.method.split()) > 3)
    allowed = {*law_of(law).arguments, *FUNCTIONS, *constants_read()}
    assert formula.names - allowed == set()
    assert meaning_of(law)
    assert "Formula" not in meaning_of(law)


@pytest.mark.parametrize("law", CLOSED, ids=name_of)
def test_the_formula_is_the_law(law: Callable[..., Any]) -> None:
    formula, rng = formula_of(law), np.random.default_rng(zlib.crc32(name_of(law).encode()))
    arguments = {name: random_values(law, name, formula, rng) for name in law_of(law).arguments}
    with np.errstate(all="ignore"):
        found = np.broadcast_to(law(**arguments), np.shape(law(**arguments)))
    program = compile(formula.expression, name_of(law), "eval")
    for row in range(ROWS):
        values = {
            name: value[row].astype(Number) if value.ndim > 1 else Number(value[row])
            for name, value in arguments.items()
        }
        known = {**FUNCTIONS, **{name: Number(getattr(constants, name)) for name in constants_read()}, **values}
        with np.errstate(all="ignore"):
            expected = np.asarray(eval(program, {"__builtins__": {}}, known), dtype=float)
        rounding = 1e-12 * np.abs(expected).max() if expected.ndim else 0.0  # of a component beside larger ones
        assert found[row] == near(expected, rel=1e-9, abs=rounding) or both_nan(found[row], expected)


def both_nan(found: Any, expected: Any) -> bool:
    return bool(np.isnan(found).all() and np.isnan(expected).all())


def random_values(law: Callable[..., Any], name: str, formula: Formula, rng: np.random.Generator) -> Any:
    """Random rows of an argument; some unknown or 0 where the formula asks whether it is."""
    kind = law_of(law).arguments[name]
    low, high = RANGES.get(kind, (0.1, 10.0))
    shape = (ROWS, *shape_of(law, name))
    if low < 0:
        values = rng.uniform(low, high, shape)
    else:
        values = np.exp(rng.uniform(np.log(low), np.log(high), shape))
        values = values * rng.choice([-1.0, 1.0], shape) if len(shape) > 1 else values
    if name in asked(formula, "unknown", "known"):
        values[rng.random(ROWS) < 0.5] = np.nan
    if name in compared_with_zero(formula):
        values[rng.random(ROWS) < 0.5] = 0.0
    return values


def shape_of(law: Callable[..., Any], name: str) -> tuple[int, ...]:
    """Components of an argument: those of the result or given that it comes from."""
    from planner.graph import givens

    by_key = {derived.key: derived for derived in graph().order}
    for derived in graph().order:
        if derived.law is law:
            key = derived.sources[name].key
            if key in by_key:
                return by_key[key].trailing
            return (3,) if key in givens() and max(givens()[key].sizes) == 3 else ()
    return (3,) if name in VECTORS else ()


def asked(formula: Formula, *functions: str) -> set[str]:
    """Plain names among the arguments of these functions, but the last of `known`: it is there for want of others."""
    calls = [node for node in ast.walk(ast.parse(formula.expression, mode="eval")) if isinstance(node, ast.Call)]
    mine = [call for call in calls if isinstance(call.func, ast.Name) and call.func.id in functions]
    taken = [one for call in mine for one in (call.args if call.func.id == "unknown" else call.args[:-1])]  # type: ignore[attr-defined]
    return {node.id for one in taken for node in ast.walk(one) if isinstance(node, ast.Name) and node.id != "frequency"}


def compared_with_zero(formula: Formula) -> set[str]:
    """Names in comparisons with 0."""
    compares = [node for node in ast.walk(ast.parse(formula.expression, mode="eval")) if isinstance(node, ast.Compare)]
    with_zero = [node for node in compares if ast.unparse(node.comparators[0]) == "0"]
    return {node.id for one in with_zero for node in ast.walk(one.left) if isinstance(node, ast.Name)}
