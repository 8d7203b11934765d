"""Gathers what the chapters declare, checks that it fits together, and gives the order in which to compute it."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from difflib import get_close_matches
from functools import cache
from graphlib import CycleError, TopologicalSorter

from planner.chapters import (
    calibration,
    chip,
    clock,
    coherence,
    coils,
    larmor,
    magnet,
    model,
    noise,
    pairs,
    source,
    thermal,
    tones,
    valley,
    wiring,
    workload,
)
from planner.declare import Compare, Derived, Given, Input, Limit, Lock, Missing, Nature, law_of
from planner.kinds import ENERGY_SQUARED, NUMBER, Kind
from planner.plan import ROWS, SECTIONS, table_givens

CHAPTERS = (
    larmor,
    magnet,
    coils,
    tones,
    wiring,
    pairs,
    clock,
    source,
    noise,
    coherence,
    calibration,
    thermal,
    valley,
    workload,
    chip,
    model,
)
DERIVEDS: tuple[Derived, ...] = tuple(derived for chapter in CHAPTERS for derived in chapter.DERIVEDS)
LIMITS: tuple[Limit, ...] = tuple(limit for chapter in CHAPTERS for limit in chapter.LIMITS)
# What the chosen material says of itself; everything that depends on it depends on the choice of the material.
MATERIAL = "chip.material"
HOST: Mapping[str, Kind] = {
    "host.hole": NUMBER,
    "host.valleys": NUMBER,
    "host.moment": ENERGY_SQUARED,
    "host.barrier_moment": ENERGY_SQUARED,
}

PAIR_PLACES: Mapping[str, Kind] = {"pair.first_place": NUMBER, "pair.second_place": NUMBER}


class WiringError(Exception):
    """The declarations don't fit together; the text lists every misfit."""


@dataclass(frozen=True, slots=True)
class Graph:
    """The checked declarations: results in an order in which each can be computed, and the limits.

    `upstream` holds all that each result depends on, `needed` the givens that anything here uses, `switched` the keys of
    switches. `parents` is one step of `upstream`.
    """

    order: tuple[Derived, ...]
    limits: tuple[Limit, ...]
    upstream: Mapping[str, frozenset[str]]
    needed: tuple[str, ...]
    switched: frozenset[str]
    parents: Mapping[str, frozenset[str]]

    def until(self, compares: Sequence[Compare], typed: frozenset[str] = frozenset()) -> Lock | None:
        """The latest lock among the choices that act on these comparisons; None where no choice does.

        `typed` are the givens that a plan types although they could be found: what they would be found from does not act.
        """
        seen: set[str] = set()
        ahead = [end for compare in compares for end in (compare.allowed, compare.expected)]
        while ahead:
            key = ahead.pop()
            if key not in seen:
                seen.add(key)
                ahead.extend(() if key in typed else self.parents.get(key, ()))
        choices = (given for key in seen if (given := givens().get(key)) is not None and given.nature is Nature.CHOICE)
        return max((given.locks for given in choices if given.locks is not None), default=None)


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
    parents = {key: frozenset(_parents(derived)) for key, derived in by_key.items()}
    try:
        order = [key for key in TopologicalSorter(parents).static_order() if key in by_key]
    except CycleError as error:
        raise WiringError("results depend on each other in a circle: " + " <- ".join(error.args[1])) from None
    upstream: dict[str, frozenset[str]] = {}
    for key in order:
        upstream[key] = parents[key].union(*(upstream.get(parent, frozenset()) for parent in parents[key]))
    used = set().union(*upstream.values(), *map(_limit_keys, limits))
    return Graph(
        tuple(by_key[key] for key in order),
        limits,
        upstream,
        tuple(key for key in givens() if key in used),
        frozenset(_switches(deriveds, limits)),
        parents,
    )


@cache
def repairable_until(compares: tuple[Compare, ...], typed: frozenset[str]) -> Lock | None:
    """`Graph.until` of the shipped chapters, worked out once."""
    return graph().until(compares, typed)


@cache
def givens() -> dict[str, Given]:
    """Every given, rows under their table's name (`qubit.g`)."""
    tables = [table for table in (*SECTIONS, *ROWS) if table != "all_qubits"]
    return {
        f"{table}.{name}" if table else name: given for table in tables for name, given in table_givens(table).items()
    }


def _parents(derived: Derived) -> Iterator[str]:
    for key in (*_asked_keys(derived), *(entry.key for entry in derived.sources.values())):
        yield key
        given = givens().get(key)
        if key.startswith("host.") or (given is not None and given.missing is Missing.MATERIAL):
            yield MATERIAL


def _switches(deriveds: tuple[Derived, ...], limits: tuple[Limit, ...]) -> Iterator[str]:
    for derived in deriveds:
        yield from (switch.key for entry in derived.sources.values() for switch in entry.when)
        if derived.only is not None:
            yield derived.only.key
    for limit in limits:
        yield from (ask.switch.key for ask in limit.asked)
        yield from (compare.when.key for compare in limit.compares if compare.when is not None)


def _asked_keys(derived: Derived) -> Iterator[str]:
    """Keys that decide whether the result is computed and which arguments it needs."""
    for entry in derived.sources.values():
        yield from (switch.key for switch in entry.when)
        if entry.unless:
            yield entry.unless
    if derived.only is not None:
        yield derived.only.key
    if derived.bound is not None:
        yield from derived.bound.inputs.values()


def _limit_keys(limit: Limit) -> set[str]:
    keys = {ask.switch.key for ask in limit.asked}
    for compare in limit.compares:
        keys |= {compare.allowed, compare.expected, *compare.only_with}
        keys |= {compare.when.key} if compare.when else set()
    return keys


def _misfits(deriveds: tuple[Derived, ...]) -> Iterator[str]:
    yield from _twice([derived.key for derived in deriveds])
    kinds = _kinds(deriveds)
    for derived in deriveds:
        declared = law_of(derived.law)
        given = givens().get(derived.key)
        if given is not None and (given.missing is not Missing.FOUND or given.kind != declared.result):
            yield f"{derived.key}: is a given, of another kind or not found from results"
        for key in _asked_keys(derived):
            yield from _unknown_key(f"{derived.key}: depends on", key, kinds)
        if set(derived.inputs) != set(declared.arguments):
            yield f"{derived.key}: {declared.name} takes {sorted(declared.arguments)}, gets {sorted(derived.inputs)}"
            continue
        for name, entry in derived.sources.items():
            yield from _input_misfits(derived.key, name, entry, declared.arguments[name], kinds)


def _input_misfits(key: str, name: str, source: Input, wanted: Kind, kinds: Mapping[str, Kind]) -> Iterator[str]:
    yield from _unknown_key(f"{key}: {name} comes from", source.key, kinds)
    offered = NUMBER if source.word is not None else kinds.get(source.key, wanted)
    if offered != wanted:
        yield f"{key}: {name} is a {wanted.name}, {source.key} is a {offered.name}"


def _limit_misfits(deriveds: tuple[Derived, ...], limits: tuple[Limit, ...]) -> Iterator[str]:
    yield from _twice([f"margin {limit.name}" for limit in limits])
    kinds = _kinds(deriveds)
    for limit in limits:
        for key in sorted(_limit_keys(limit)):
            yield from _unknown_key(f"margin {limit.name}:", key, kinds)
        for compare in limit.compares:
            for end in (compare.allowed, compare.expected):
                if end in kinds and kinds[end].si != compare.kind.si:
                    yield f"margin {limit.name}: {end} is a {kinds[end].name}, compared as {compare.kind.name}"


def _twice(names: Sequence[str]) -> Iterator[str]:
    yield from (f"{name}: declared twice" for name in sorted({name for name in names if names.count(name) > 1}))


def _unknown_key(where: str, key: str, kinds: Mapping[str, Kind]) -> Iterator[str]:
    if key not in kinds:
        close = get_close_matches(key, list(kinds), n=1)
        yield f"{where} unknown '{key}'" + (f", did you mean {close[0]}?" if close else "")


def _kinds(deriveds: tuple[Derived, ...]) -> dict[str, Kind]:
    """Kind of every given and result; a choice of words counts as a number, for the use of its words."""
    typed = {key: given.kind or NUMBER for key, given in givens().items()}
    return {**typed, **HOST, **PAIR_PLACES, **{derived.key: derived.kind for derived in deriveds}}
