"""Known ranges of what nobody typed: they hold the value itself, have a source, and agree with what people use."""

from __future__ import annotations

import re
import tomllib
from pathlib import Path

import pytest

from planner.constants import MICRO_EV
from planner.declare import Given, Missing, Nature
from planner.graph import givens
from planner.kinds import Quantity, parse
from planner.materials import material, material_titles
from planner.plan import Plan, unstated
from planner.planfile import read
from planner.ranges import coupling_spans, span
from planner.references import references
from planner.values import number

ROOT = Path(__file__).parents[1]
TABLE = tomllib.loads((ROOT / "planner" / "data" / "ranges.toml").read_text(encoding="utf-8"))
MATERIALS = sorted(material_titles())
FOUND = [(key, name) for name in MATERIALS for key in givens() if span(key, name) is not None]


def plan_with(name: str) -> Plan:
    text = (ROOT / "plans" / "minimal.toml").read_text("utf-8").replace("si-sige-natural", name)
    return read(text, "minimal.toml").plan


def ends(key: str, name: str | None = None) -> tuple[float, float]:
    found = span(key, name)
    assert found is not None
    return number(found.low), number(found.high)


@pytest.mark.parametrize(("key", "name"), FOUND)
def test_a_range_holds_the_value_that_stands_in(key: str, name: str) -> None:
    table, _, field = key.rpartition(".")
    value, source = unstated(plan_with(name), table, field)
    assert isinstance(value, Quantity)
    low, high = ends(key, name)
    assert low <= number(value) <= high
    assert low < high
    assert source in ("default", "material")


@pytest.mark.parametrize(("key", "name"), FOUND)
def test_a_range_has_a_reference_and_a_status(key: str, name: str) -> None:
    found = span(key, name)
    assert found is not None
    assert found.reference in references()
    assert found.status in ("read", "computed", "from memory")


@pytest.mark.parametrize("key", TABLE)
def test_listed_are_defaults_that_describe_what_is_there(key: str) -> None:
    assert givens()[key].missing is Missing.DEFAULT
    assert givens()[key].nature is not Nature.DEMAND
    assert set(TABLE[key]) == {"low", "high", "reference", "status"}


def sensible_ends(given: Given) -> tuple[float, float]:
    """The two numbers of the words 'LOW to HIGH UNIT' about what people use, SI."""
    found = re.fullmatch(r"(\S+) to (\S+)(.*)", given.sensible)
    assert found is not None
    assert given.kind is not None
    low, high = (number(parse(given.kind, f"{end}{found[3]}")) for end in (found[1], found[2]))
    return low, high


@pytest.mark.parametrize("key", TABLE)
def test_the_words_about_what_people_use_name_the_same_ends(key: str) -> None:
    assert ends(key) == sensible_ends(givens()[key])


@pytest.mark.parametrize(
    ("key", "name", "low", "high"),
    [
        # all from memory or common practice; SI
        ("magnet.noise_driven", None, 0.1e-6, 3e-6),
        ("magnet.noise_persistent", None, 1e-9, 50e-9),
        ("magnet.drift_driven", None, 0.5e-6 / 3600, 20e-6 / 3600),
        ("magnet.drift_persistent", None, 1e-9 / 3600, 0.5e-6 / 3600),
        ("magnet.settle_slope", None, 3e-6 / 3600, 50e-6 / 3600),
        ("magnet.remanence", "gaas", 0.1e-3, 10e-3),
        ("source.image", None, 1e-7, 1e-3),
        ("clock.aging", None, 1e-12 / 86400, 1e-8 / 86400),
        ("model.nuclei", "si-fin-natural", 5e3, 5e4),
        ("model.barrier_share", "si-sige-60ppm", 0.005, 0.03),
        ("model.relative_noise", "ge-sige-500ppm", 5e-6, 15e-6),
    ],
)
def test_some_ranges(key: str, name: str | None, low: float, high: float) -> None:
    assert ends(key, name) == pytest.approx((low, high))


@pytest.mark.parametrize(
    ("key", "name"),
    [
        ("model.nuclei", None),  # no material, no value
        ("model.relative_noise", "gaas"),  # electrons bring none
        ("model.spinful_fraction", "si-sige-natural"),  # known well
        ("calibration.interval", "gaas"),  # set at will
        ("workload.source_share", "gaas"),  # demanded
        ("magnet.field", "gaas"),  # required
        ("qubit.t1", "gaas"), ("qubit.Q1.t1", "gaas"), ("larmor.frequency", "gaas"), ("magnet.", None), ("", None),
        ("no.such", None),
    ],
)  # fmt: skip
def test_no_range_is_known_of(key: str, name: str | None) -> None:
    assert span(key, name) is None


@pytest.mark.parametrize("name", MATERIALS)
def test_couplings_range_around_their_values(name: str) -> None:
    host = material(name)
    moments = {"host.moment": host.moment, "host.barrier_moment": host.barrier.moment}
    found = coupling_spans(name)
    assert "host.moment" in {key for key, _, _ in found}
    for key, low, high in found:
        assert low <= moments[key] <= high
        assert low < high


def test_the_moments_go_with_the_squares_of_the_couplings() -> None:
    # a heavy hole on 29Si 1.45 to 2.5 ueV, spin 1/2: A^2 I(I+1)/3 = A^2/4; no barrier
    ((key, low, high),) = coupling_spans("si-fin-natural")
    assert key == "host.moment"
    assert (low, high) == pytest.approx(((1.45 * MICRO_EV) ** 2 / 4, (2.5 * MICRO_EV) ** 2 / 4))
    # 73Ge beside the silicon well, 570(170) of bunching, 1.9 to 3.5 ueV, spin 9/2: A^2 33/4
    barrier = {key: ends for key, *ends in coupling_spans("si-sige-800ppm")}["host.barrier_moment"]
    assert barrier == pytest.approx([8.25 * (1.9 * MICRO_EV) ** 2, 8.25 * (3.5 * MICRO_EV) ** 2])


def test_isotopes_move_together() -> None:
    # GaAs: 43.5 to 46 (As), 38.2 to 43.1 and 48.5 to 54.8 ueV (Ga), weights 2, 1.20216, 0.79784, spin 3/2: A^2 5/4
    low, high = (2 * a**2 + 1.20216 * b**2 + 0.79784 * c**2 for a, b, c in ((43.5, 38.2, 48.5), (46, 43.1, 54.8)))
    ((key, *found),) = coupling_spans("gaas")
    assert key == "host.moment"
    assert found == pytest.approx([1.25 * low * MICRO_EV**2, 1.25 * high * MICRO_EV**2])
