"""The formula of a law as people read it, from the one place where it stands.

A law whose body is a single expression is its own formula: its source, in plain names. Any other law says it in its
docstring, in lines that begin with "Formula:": an expression, or "none" and the method in its place.

Beside the law's arguments and the constants of `planner.constants` an expression holds `pi`, the functions sqrt, exp, log,
sin, cos, tanh, abs, min, max and sum, `@` for products of vectors and matrices, `nan` for no value, and what `NOTES` names.
"""

from __future__ import annotations

import ast
import inspect
import re
import textwrap
from collections.abc import Callable
from dataclasses import dataclass
from functools import cache
from typing import Any

from planner import constants

MARK, NONE = "Formula:", "none"
NOTES = {
    "norm": "norm(v) is the size of a vector",
    "vector": "vector(a, b, c) has these components in the chip frame",
    "unknown": "unknown(x) holds where x is neither typed nor found",
    "known": "known(a, b, ...) is the first of them that is known",
}
_PLAIN = {"maximum": "max", "minimum": "min", "isnan": "unknown"}
_UNCHANGED = {"sqrt", "exp", "log", "sin", "cos", "tanh", "abs"}


@dataclass(frozen=True, slots=True)
class Formula:
    """An `expression` in Python syntax, or, where there is no closed one, the `method` in its place."""

    expression: str
    method: str = ""

    @property
    def names(self) -> frozenset[str]:
        """The names in the expression."""
        nodes = ast.walk(ast.parse(self.expression or "0", mode="eval"))
        return frozenset(node.id for node in nodes if isinstance(node, ast.Name))


@cache
def formula_of(function: Callable[..., Any]) -> Formula:
    """The formula of a law's function. Raises ValueError where neither body nor docstring holds one."""
    stated = inspect.getdoc(function) or ""
    _, mark, rest = stated.partition(f"\n{MARK}")
    if mark:
        text = " ".join(rest.partition("\n\n")[0].split())
        if re.match(rf"{NONE}\b", text):
            return Formula("", text[len(NONE) :].lstrip(" ;:,."))
        return Formula(_written(ast.parse(text, mode="eval")))
    returned = _only_expression(function)
    if returned is None:
        raise ValueError(f"law {function.__name__}: its body is no single expression, so its docstring needs '{MARK}'")
    return Formula(_written(ast.fix_missing_locations(_Readable().visit(returned))))


@cache
def meaning_of(function: Callable[..., Any]) -> str:
    """What the law's docstring says before its formula, in one line."""
    return " ".join((inspect.getdoc(function) or "").partition(f"\n{MARK}")[0].split())


def notes_on(formula: Formula) -> list[str]:
    """What the less usual functions of a formula mean."""
    return [note for name, note in NOTES.items() if name in formula.names]


@cache
def constants_read() -> dict[str, str]:
    """Each constant's value with what stands behind it: unit and source."""
    lines = re.findall(r"^(\w+): Final = .*?# (.*)$", inspect.getsource(constants), re.MULTILINE)
    return {name: f"{getattr(constants, name):.10g} {behind}" for name, behind in lines}


def _written(expression: ast.AST) -> str:
    return ast.unparse(expression).replace(" ** ", "**")


def _only_expression(function: Callable[..., Any]) -> ast.expr | None:
    (definition,) = ast.parse(textwrap.dedent(inspect.getsource(function))).body
    assert isinstance(definition, ast.FunctionDef)
    body = definition.body[1:]  # behind the docstring
    return body[0].value if len(body) == 1 and isinstance(body[0], ast.Return) else None


class _Readable(ast.NodeTransformer):
    """Plain names in the place of numpy's, and nothing of how arrays are laid out."""

    def visit_Call(self, node: ast.Call) -> ast.AST:
        name = getattr(node.func, "attr", "")
        self.generic_visit(node)
        if name in _REWRITTEN:
            return _REWRITTEN[name](*node.args)
        if name == "sum" and isinstance(node.func, ast.Attribute):
            return _call("sum", node.func.value)
        return _call(_PLAIN.get(name, name), *node.args) if name in _UNCHANGED or name in _PLAIN else node

    def visit_Attribute(self, node: ast.Attribute) -> ast.AST:
        self.generic_visit(node)
        return ast.Name(node.attr) if isinstance(node.value, ast.Name) and node.value.id == "np" else node

    def visit_Subscript(self, node: ast.Subscript) -> ast.AST:
        self.generic_visit(node)
        return node.value  # the laws index only to line up axes


def _call(name: str, *arguments: ast.expr) -> ast.Call:
    return ast.Call(ast.Name(name), list(arguments), [])


def _sum(first: ast.expr, second: ast.expr) -> ast.BinOp:
    """first + second, as a difference where the second begins with a minus."""
    positive = _without_minus(second)
    return ast.BinOp(first, ast.Add(), second) if positive is None else ast.BinOp(first, ast.Sub(), positive)


def _without_minus(node: ast.expr) -> ast.expr | None:
    if isinstance(node, ast.UnaryOp) and isinstance(node.op, ast.USub):
        return node.operand
    if isinstance(node, ast.BinOp) and isinstance(node.op, ast.Mult | ast.Div):
        left = _without_minus(node.left)
        return None if left is None else ast.BinOp(left, node.op, node.right)
    return None


_REWRITTEN: dict[str, Callable[..., ast.expr]] = {
    "where": ast.IfExp,
    "asarray": lambda value: value,
    "hypot": lambda *sides: _call("sqrt", _sum(*(ast.BinOp(side, ast.Pow(), ast.Constant(2)) for side in sides))),
    "log1p": lambda value: _call("log", _sum(ast.Constant(1), value)),
    "expm1": lambda value: ast.BinOp(_call("exp", value), ast.Sub(), ast.Constant(1)),
}
