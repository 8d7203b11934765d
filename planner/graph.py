"""Gathers what the chapters declare, checks that it fits together, and gives the order in which to compute it."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from difflib import get_close_matches
from functools import cache
from graphlib import CycleError, TopologicalSorter

from planner.chapters import calibration, chip, clock, coherence, larmor, magnet, model, noise, source, thermal, valley, workload
from planner.declare import Compare, Derived, Given, Input, Limit, Lock, Missing, Nature, law_of
from planner.kinds import ENERGY_SQUARED, NUMBER, Kind
from planner.plan import ROWS, SECTIONS, table_givens

CHAPTERS = (larmor, magnet, clock, source, noise, coherence, calibration, thermal, valley, workload, chip, model)
DERIVEDS: tuple[Derived, ...] = tuple(derived for chapter in CHAPTERS for derived in chapter.DERIVEDS)
LIMITS: tuple[Limit, ...] = tuple(limit for chapter in CHAPTERS for limit in chapter.LIMITS)
# What the chosen material says of itself; everything that depends on it depends on the choice of the material.
MATERIAL = "chip.material"
HOST: Mapping[str, Kind] = {
    "host.hole": NUMBER, "host.valleys": NUMBER, "host.moment": ENERGY_SQUARED, "host.barrier_moment": ENERGY_SQUARED,
}


class WiringError(Exception):
    """The declarations don't fit together; the text lists every misfit."""


@dataclass(frozen=True, slots=True)
class Graph:
    """Results in an order in which each can be computed, the limits, what lies upstream of every result, the givens that
    any of these needs, and the latest lock of the choices that act on each side of a comparison."""

    order: tuple[Derived, ...]
    limits: tuple[Limit, ...]
    upstream: Mapping[str, frozenset[str]]
    needed: tuple[str, ...]
    locks: Mapping[str, Lock | None]

    def until(self, compares: Sequence[Compare]) -> Lock | None:
        """The latest lock among the choices upstream of these comparisons; None where no choice acts on them."""
        locks = (self.locks[end] for compare in compares for end in (compare.allowed, compare.expected))
        return max((lock for lock in locks if lock is not None), default=None)


@cache
def graph() -> Graph:
    """The graph of the shipped chapters, checked. Raises WiringError."""
    return build(DERIVEDS, LIMITS)


def build(deriveds: tuple[Derived, ...], limits: tuple[Limit, ...]) -> Graph:
    """Check these declarations and order them. Raises WiringError with every misfit."""
    misfits = [*_misfits(deriveds), *_limit_misfits(deriveds, limits)]
    if misfits:
        raise WiringError("\n".join(misfits))
    by_key = {derived.key: derived for derived in deriveds}
    parents = {key: frozenset(_parents(derived)) - {key} for key, derived in by_key.items()}
    try:
        order = [key for key in TopologicalSorter(parents).static_order() if key in by_key]
    except CycleError as error:
        raise WiringError("results depend on each other in a circle: " + " <- ".join(error.args[1])) from None
    upstream: dict[str, frozenset[str]] = {}
    for key in order:
        upstream[key] = parents[key].union(*(upstream.get(parent, frozenset()) for parent in parents[key]))
    used = set().union(*upstream.values(), *map(_limit_keys, limits))
    ends = {end for limit in limits for compare in limit.compares for end in (compare.allowed, compare.expected)}
    return Graph(tuple(by_key[key] for key in order), limits, upstream, tuple(key for key in givens() if key in used),
                 {end: _latest_lock({end, *upstream.get(end, ())}) for end in ends})


@cache
def givens() -> dict[str, Given]:
    """Every given, rows under their table's name (`qubit.g`)."""
    tables = [table for table in (*SECTIONS, *ROWS) if table != "all_qubits"]
    return {f"{table}.{name}" if table else name: given for table in tables for name, given in table_givens(table).items()}


def _parents(derived: Derived) -> Iterator[str]:
    for source in derived.sources.values():
        yield source.key
        if source.when is not None:
            yield source.when.key
        if source.unless:
            yield source.unless
        if source.key.startswith("host."):
            yield MATERIAL
        given = givens().get(source.key)
        if given is not None and given.missing is Missing.MATERIAL:
            yield MATERIAL
    if derived.only is not None:
        yield derived.only.key


def _limit_keys(limit: Limit) -> set[str]:
    keys = {limit.asked.key} if limit.asked else set()
    for compare in limit.compares:
        keys |= {compare.allowed, compare.expected, *compare.only_with}
        keys |= {compare.when.key} if compare.when else set()
    return keys


def _latest_lock(keys: set[str]) -> Lock | None:
    choices = (given for key in keys if (given := givens().get(key)) is not None and given.nature is Nature.CHOICE)
    return max((given.locks for given in choices if given.locks is not None), default=None)


def _misfits(deriveds: tuple[Derived, ...]) -> Iterator[str]:
    keys = [derived.key for derived in deriveds]
    yield from (f"{key}: declared twice" for key in sorted({key for key in keys if keys.count(key) > 1}))
    kinds = _kinds(deriveds)
    for derived in deriveds:
        declared = law_of(derived.law)
        given = givens().get(derived.key)
        if given is not None and (given.missing is not Missing.FOUND or given.kind != declared.result):
            yield f"{derived.key}: is a given, of another kind or not found from results"
        if set(derived.inputs) != set(declared.arguments):
            yield f"{derived.key}: {declared.name} takes {sorted(declared.arguments)}, gets {sorted(derived.inputs)}"
            continue
        for name, source in derived.sources.items():
            yield from _input_misfits(derived.key, name, source, declared.arguments[name], kinds)


def _input_misfits(key: str, name: str, source: Input, wanted: Kind, kinds: Mapping[str, Kind]) -> Iterator[str]:
    if source.key not in kinds:
        close = get_close_matches(source.key, list(kinds), n=1)
        yield f"{key}: {name} comes from unknown '{source.key}'" + (f", did you mean {close[0]}?" if close else "")
        return
    offered = NUMBER if source.word else kinds[source.key]
    if offered != wanted:
        yield f"{key}: {name} is a {wanted.name}, {source.key} is a {offered.name}"


def _limit_misfits(deriveds: tuple[Derived, ...], limits: tuple[Limit, ...]) -> Iterator[str]:
    kinds = _kinds(deriveds)
    for limit in limits:
        for compare in limit.compares:
            for end in (compare.allowed, compare.expected):
                if end not in kinds:
                    close = get_close_matches(end, list(kinds), n=1)
                    yield f"margin {limit.name}: unknown '{end}'" + (f", did you mean {close[0]}?" if close else "")
                elif kinds[end].si != compare.kind.si:
                    yield f"margin {limit.name}: {end} is a {kinds[end].name}, compared as {compare.kind.name}"


def _kinds(deriveds: tuple[Derived, ...]) -> dict[str, Kind]:
    """Kind of every given and result; a choice of words counts as a number, for the use of its words."""
    typed = {key: given.kind or NUMBER for key, given in givens().items()}
    return {**typed, **HOST, **{derived.key: derived.kind for derived in deriveds}}
