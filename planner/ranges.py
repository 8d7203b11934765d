"""Known ranges of the values that stand for givens nobody typed: of the material's, of its couplings, and of defaults."""

from __future__ import annotations

import tomllib
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from typing import Any

from planner.declare import Given, Missing
from planner.kinds import Quantity
from planner.materials import material
from planner.plan import ROWS, SECTIONS, table_givens
from planner.values import read_value


@dataclass(frozen=True, slots=True)
class Span:
    """The ends of a known range as quantities, the key of its reference, and the status of the numbers."""

    low: Quantity
    high: Quantity
    reference: str
    status: str


@cache
def span(key: str, material_name: str | None) -> Span | None:
    """The range of the value that stands for a given nobody typed: the default, or the value of this material.

    `key` is the given's, rows without their names (`line.count`). None for any other key and where no range is known.
    Raises KeyError for a material that is not shipped.
    """
    given = _given(key)
    if given is None:
        return None
    if given.missing is Missing.MATERIAL:
        return _of_material(given, key, material_name) if material_name else None
    entry = _table().get(key)
    return _span(given, **entry) if entry else None


@cache
def coupling_spans(material_name: str) -> tuple[tuple[str, float, float], ...]:
    """`host.moment` and `host.barrier_moment`, each with its lowest and highest value (J^2), where a range is known.

    The couplings of all isotopes of a bath stand at the low ends of their ranges together, and at the high ones.
    Raises KeyError for a material that is not shipped.
    """
    host = material(material_name)
    baths = (("host.moment", host.nuclei), ("host.barrier_moment", (host.barrier,)))
    spans = ((key, [nucleus.moment_ends for nucleus in nuclei]) for key, nuclei in baths)
    sums = ((key, sum(low for low, _ in ends), sum(high for _, high in ends)) for key, ends in spans)
    return tuple(found for found in sums if found[1] < found[2])


@cache
def _table() -> dict[str, Any]:
    return tomllib.loads(files("planner.data").joinpath("ranges.toml").read_text("utf-8"))


def _given(key: str) -> Given | None:
    table, _, name = key.rpartition(".")
    return table_givens(table).get(name) if table in SECTIONS or table in ROWS else None


def _of_material(given: Given, key: str, material_name: str) -> Span | None:
    value = material(material_name).values.get(key)
    if value is None or value.low is None or value.high is None:
        return None
    return _span(given, low=value.low, high=value.high, reference=value.reference, status=value.status)


def _span(given: Given, *, low: str, high: str, reference: str, status: str) -> Span:
    lowest, highest = (read_value(given, end) for end in (low, high))
    assert isinstance(lowest, Quantity)
    assert isinstance(highest, Quantity)
    return Span(lowest, highest, reference, status)
