"""The shipped materials: carrier, nuclei with their couplings, and the defaults that a material brings to a plan."""

from __future__ import annotations

import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from typing import Any

from planner.kinds import ENERGY, parse


@dataclass(frozen=True, slots=True)
class Sourced:
    """A quantity with the ends of its known range (None: none known), its reference key and status."""

    text: str
    low: str | None
    high: str | None
    reference: str
    status: str


@dataclass(frozen=True, slots=True)
class Nucleus:
    """One isotope of a bath: spin, share of all atoms at a spinful fraction of 1, and its coupling (J, atom-normalised)."""

    isotope: str
    spin: float
    weight: float
    coupling: float
    source: Sourced

    @property
    def moment(self) -> float:
        """w A^2 I (I + 1)/3 in J^2: its part of the variance of the energy, times atoms over spinful fraction."""
        return self._moment(self.coupling)

    @property
    def moment_ends(self) -> tuple[float, float]:
        """Its moment with the coupling at either end of the known range; the moment itself where none is known."""
        low, high = (end or self.source.text for end in (self.source.low, self.source.high))
        return self._moment(_energy(low)), self._moment(_energy(high))

    def _moment(self, coupling: float) -> float:
        return self.weight * coupling**2 * self.spin * (self.spin + 1) / 3


@dataclass(frozen=True, slots=True)
class Material:
    """One host with its carrier; `values` are its defaults by the key of the given."""

    name: str
    title: str
    hole: bool
    valleys: bool
    nuclei: tuple[Nucleus, ...]
    barrier: Nucleus
    values: Mapping[str, Sourced]

    @property
    def moment(self) -> float:
        """Sum over the isotopes of w A^2 I (I + 1)/3, J^2."""
        return sum(nucleus.moment for nucleus in self.nuclei)


@cache
def _table() -> dict[str, Any]:
    return tomllib.loads(files("planner.data").joinpath("materials.toml").read_text("utf-8"))


def edition() -> str:
    """Version of the shipped data; part of every plan's hash."""
    return str(_table()["edition"])


def material_titles() -> dict[str, str]:
    """Names of the shipped materials, each with its title."""
    return {name: str(_resolved(name)["title"]) for name in _table()["material"]}


def isotope_fraction(isotope: str) -> tuple[float, float]:
    """Spin and natural fraction (on its own sublattice) of an isotope."""
    entry = _table()["isotope"][isotope]
    return float(entry["spin"]), float(entry["fraction"]["value"])


@cache
def material(name: str) -> Material:
    """The shipped material of that name; KeyError if there is none."""
    entry = _resolved(name)
    return Material(
        name=name,
        title=entry["title"],
        hole=entry["carrier"] == "hole",
        valleys=entry["valleys"],
        nuclei=tuple(_nucleus(nucleus) for nucleus in entry["nuclei"]),
        barrier=_nucleus(entry["barrier"]),
        values={key: _sourced(value) for key, value in entry["values"].items()},
    )


def _resolved(name: str) -> dict[str, Any]:
    """The entry with what it does not state itself taken from its base."""
    entry: dict[str, Any] = _table()["material"][name]
    if "base" not in entry:
        return entry
    base = _resolved(entry["base"])
    return {**base, **entry, "values": {**base["values"], **entry["values"]}}


def _nucleus(entry: Mapping[str, Any]) -> Nucleus:
    spin, _ = isotope_fraction(entry["isotope"])
    return Nucleus(
        isotope=entry["isotope"],
        spin=spin,
        weight=float(entry["weight"]),
        coupling=_energy(entry["coupling"]),
        source=_sourced({"text": entry["coupling"], **entry}),
    )


def _energy(text: str) -> float:
    value = parse(ENERGY, text).value
    assert isinstance(value, float)
    return value


def _sourced(entry: Mapping[str, Any]) -> Sourced:
    return Sourced(
        text=entry["text"],
        low=entry.get("low"),
        high=entry.get("high"),
        reference=entry["reference"],
        status=entry["status"],
    )
