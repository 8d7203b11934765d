"""The demo run: what each shipped plan must read, against the worked scenario that the demo plans were made from.

The scenario (an invented run, worked out by hand for this project) states frequencies, T2* and margins. Where the program
differs, the row says by how much and why; everything else must agree to the digits that the scenario prints.
"""

from __future__ import annotations

import re
from functools import cache
from pathlib import Path

import pytest

from planner.evaluate import Evaluation, evaluate
from planner.planfile import load
from planner.planfile import read as parsed

PLANS = Path(__file__).parents[1] / "plans"


@cache
def read(name: str) -> Evaluation:
    return evaluate(load(PLANS / f"{name}.toml").plan)


def row(evaluation: Evaluation, key: str, scale: float) -> list[float]:
    return [float(value) * scale for value in evaluation.columns[key].base()]


def test_every_plan_says_that_it_is_invented() -> None:
    for path in PLANS.glob("*.toml"):
        assert path.read_text("utf-8").startswith("# Invented demo"), path


@pytest.mark.parametrize(
    ("plan", "gigahertz"),
    [
        ("sq6-03-drafted", [15.845, 15.991, 16.114, 16.263, 16.330, 16.485]),
        ("sq6-03", [13.886, 14.032, 14.155, 14.304, 14.371, 14.526]),
        ("gh4-11-drafted", [1.284, 1.482, 1.264, 1.959]),
        ("gh4-11", [1.414, 1.374, 1.530, 1.453]),
    ],
)
def test_frequencies(plan: str, gigahertz: list[float]) -> None:
    assert row(read(plan), "larmor.frequency", 1e-9) == pytest.approx(gigahertz, abs=5.1e-4)


@pytest.mark.parametrize(
    ("plan", "share"), [("gh4-11-drafted", [0.13, 0.25, 0.45, 0.53]), ("gh4-11", [0.20, 0.24, 0.16, 0.18])]
)
def test_share_of_the_heavy_axis(plan: str, share: list[float]) -> None:
    assert row(read(plan), "larmor.axis", 1.0) == pytest.approx(share, abs=5.1e-3)


@pytest.mark.parametrize(
    ("plan", "name", "qubit", "margin", "verdict", "scenario", "why"),
    [
        ("sq6-03-drafted", "valley", "Q4", 0.3426, "short", 0.34, ""),
        ("sq6-03", "valley", "Q4", 1.355, "clear", 1.36, ""),
        # 1.02 there: a coarser 1/f (rms cut at the shot's length); the exact integral to the wait is 1.2 % smaller
        ("sq6-03-drafted", "wait", "Q3", 1.032, "tight", 1.02, "coarser 1/f"),
        ("sq6-03", "wait", "Q3", 1.032, "tight", 1.02, "coarser 1/f"),
        ("gh4-11-drafted", "wait", "Q4", 0.6655, "short", 0.67, ""),
        ("gh4-11", "wait", "Q1", 1.2716, "clear", 1.26, "coarser 1/f"),
        # 1.55 there: the window is held against 5 k (T + u); here the tolerance makes a range instead
        ("sq6-03-drafted", "readout", "", 1.710, "clear", 1.55, "tolerance of T in the expected side"),
        ("gh4-11-drafted", "readout", "", 4.463, "clear", 3.87, "tolerance of T in the expected side"),
        ("sq6-03", "crosstalk", "Q4", 1.129, "tight", 1.13, ""),
        ("sq6-03-drafted", "drive-power", "drive", 1.778, "clear", 1.78, ""),
        ("sq6-03-drafted", "micromagnet", "", 1.68, "clear", 1.68, ""),
        ("sq6-03", "micromagnet", "", 1.40, "clear", 1.40, ""),
        # 1.56 there: the oscillator exactly in the middle; here on whole MHz and clear of every image
        ("sq6-03-drafted", "mixing", "Q1", 1.535, "clear", 1.56, "oscillator on whole MHz, clear of images"),
        # the silicon holds the phase of its spectrum over the sequence against its own share, not a tenth of the wait
        ("gh4-11-drafted", "crosstalk", "Q1", 1.634, "clear", 1.63, ""),
        # 8.80, 1.69 and 6.02 there: only the pi pulse; here relaxation (where T1 is stated) belongs to a gate, and the pulse
        # sees the 1/f noise of its own, shorter time
        ("sq6-03-drafted", "gate", "Q3", 8.34, "clear", 8.80, "relaxation, and 1/f over the pulse"),
        ("gh4-11-drafted", "gate", "Q4", 1.6658, "clear", 1.69, "exact average, and 1/f over the pulse"),
        ("gh4-11", "gate", "Q1", 5.9126, "clear", 6.02, "exact average, and 1/f over the pulse"),
    ],
)
def test_margins(plan: str, name: str, qubit: str, margin: float, verdict: str, scenario: float, why: str) -> None:
    found = read(plan).margin(name)
    assert found is not None
    assert (found.row, found.verdict) == (qubit, verdict)
    assert found.value == pytest.approx(margin, rel=1e-3)  # by = regression
    assert found.value == pytest.approx(scenario, rel=0.16 if why else 0.012), why or "agrees to the printed digits"


def test_decay_times_are_longer_than_the_scenario_by_its_coarser_flicker() -> None:
    # the scenario: 10.5, 9.5, 8.6, 8.9, 9.8, 10.9 us with calibration and drift counted in; they do not shorten T2* here
    assert row(read("sq6-03-drafted"), "coherence.t2_star", 1e6) == pytest.approx(
        [10.5, 9.5, 8.6, 8.9, 9.8, 10.9], rel=0.08
    )


def test_the_drafted_holes_have_one_cause_for_two_short_margins() -> None:
    evaluation = read("gh4-11-drafted")
    short = [margin.name for margin in evaluation.ranked if margin.verdict == "short"]
    assert short == ["wait", "field-noise"]


def test_verdicts_of_the_plans() -> None:
    verdicts = {path.stem: read(path.stem).verdict for path in PLANS.glob("*.toml")}
    assert verdicts == {
        "sq6-03-drafted": "short", "sq6-03": "tight", "gh4-11-drafted": "short", "gh4-11": "tight", "minimal": "unknown",
    }  # fmt: skip


def altered(name: str, **lines: str) -> Evaluation:
    """A shipped plan with some of its lines typed otherwise."""
    text = (PLANS / f"{name}.toml").read_text("utf-8")
    for key, value in lines.items():
        text, count = re.subn(rf"(?m)^{key} = .*$", f"{key} = {value}", text, count=1)
        assert count == 1, key
    return evaluate(parsed(text, f"{name}.toml").plan)


@pytest.mark.parametrize(
    ("plan", "hottest", "readout", "error"),
    [("sq6-03-drafted", "105 mK", 1.55, 0.0261), ("sq6-03", "105 mK", 1.55, 0.0402), ("gh4-11", "150 mK", 3.87, None)],
)
def test_at_the_upper_end_of_the_electron_temperature_readout_agrees(
    plan: str, hottest: str, readout: float, error: float | None
) -> None:
    evaluation = altered(plan, electron_temperature=f'"{hottest}"')
    found = evaluation.margin("readout")
    assert found is not None
    assert found.value == pytest.approx(readout, rel=0.005)
    if error is not None:
        assert max(row(evaluation, "thermal.readout_error", 1.0)) == pytest.approx(error, rel=0.005)


@pytest.mark.parametrize(
    ("line", "scenario", "within"),
    [
        # driven: 0.49 and 0.50 there; the local field of the micromagnet does not drift with the magnet here
        ({"mode": '"driven"'}, 0.50, 0.05),
        ({"interval": '"10 min"'}, 1.03, 0.02),
        ({"refocusing_pulses": "1"}, 6.1, 0.02),
        ({"longest_wait": '"1.2 us"'}, 1.27, 0.02),
    ],
)
def test_what_moves_the_wait_of_the_worst_electron(line: dict[str, str], scenario: float, within: float) -> None:
    found = altered("sq6-03", **line).margin("wait")
    assert found is not None
    assert found.row == "Q3"
    assert found.value == pytest.approx(scenario, rel=within)


@pytest.mark.parametrize(
    ("plan", "current", "photons"),
    [
        ("sq6-03-drafted", None, 1.02),
        ("sq6-03", None, 1.17),
        ("gh4-11-drafted", [4.28, 0, -0.56], None),
        ("gh4-11", [2.69, -15.54, -0.53], None),
    ],
)
def test_currents_and_photons(plan: str, current: list[float] | None, photons: float | None) -> None:
    if current is not None:
        assert row(read(plan), "coil.current", 1.0) == pytest.approx(current, abs=0.0051)
    if photons is not None:
        assert row(read(plan), "line.photons", 1.0)[0] == pytest.approx(photons, rel=0.02)


def test_heat_and_step_of_the_drafted_electrons() -> None:
    assert row(read("sq6-03-drafted"), "stage.heat", 1e6)[-1] == pytest.approx(0.30, abs=0.005)
    assert 2 * max(row(read("sq6-03-drafted"), "coil.half_step", 1e-3)) == pytest.approx(196, abs=0.5)


@pytest.mark.parametrize(("plan", "needed"), [("sq6-03-drafted", 1.61e-7), ("sq6-03", 1.83e-7)])
def test_a_loose_clock_agrees_at_the_share_of_the_scenario(plan: str, needed: float) -> None:
    # a tenth of the allowed noise there, 0.3 here; its margin (0.80, 0.91) weighs the whole frequency, here the loose tone
    evaluation = altered(plan, loose='"carrier"', accumulation='"randomised"\nsource_share = 0.1')
    assert min(row(evaluation, "clock.required_accuracy", 1.0)) == pytest.approx(needed, rel=0.005)
    found = evaluation.margin("loose-clock")
    assert found is not None
    assert found.value == pytest.approx(needed / 2e-7, rel=0.03)


# Of the scenario's checks these have another definition here: `band` (our guard and search window against its plain ratio to
# the edge), `rating` (the worst of magnet and coils: 1 T of the vector, not 6 T of z), `parts` (thin film with its in-plane
# share, the mount's tolerance added), `mixing` of gh4-11 (6.41: no oscillator that keeps clear of images), settling (the
# micromagnet's field does not drift), `calibration-time` (its 0.00096 is about twice shots x (shot + wait) of every qubit),
# phase noise (0.00227 rad at the stated carrier, here scaled to each qubit), out-of-plane angle (`direction`, not here yet).
