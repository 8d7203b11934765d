"""Low and high of margins: against evaluations with the numbers moved by hand, and what ranges do to verdicts."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
import pytest

from planner.evaluate import Evaluation, evaluate
from planner.leads import changes, low_end, root_sum_square
from planner.margins import Margin
from tests.physics import row
from tests.planmaking import Entry, of, plan_of

# Nothing but what a test makes doubtful may move these margins: the field, the window and the temperature are exact.
READOUT: Mapping[str, Entry] = {"workload.readout": "parity", "workload.blockade_window": "60 ueV"}


def evaluated(changed: Mapping[str, Entry], *, ranges: bool = True) -> Evaluation:
    return evaluate(plan_of(changed), ranges=ranges)


def found(changed: Mapping[str, Entry], name: str) -> Margin:
    margin = evaluated(changed).margin(name)
    assert margin is not None
    return margin


def alone(changed: Mapping[str, Entry], name: str) -> float:
    margin = evaluated(changed, ranges=False).margin(name)
    assert margin is not None
    assert margin.value is not None
    return margin.value


def readout(temperature: str, window: str = "60 ueV") -> dict[str, Entry]:
    return {**READOUT, "chip.electron_temperature": temperature, "workload.blockade_window": window}


def test_ends_are_two_evaluations_with_the_given_moved() -> None:
    margin = found(readout("100 ± 10 mK"), "readout")
    assert margin.value == pytest.approx(alone(readout("100 mK"), "readout"), rel=1e-12)
    assert margin.low == pytest.approx(alone(readout("110 mK"), "readout"), rel=1e-12)
    assert margin.high == pytest.approx(alone(readout("90 mK"), "readout"), rel=1e-12)


def test_two_doubtful_numbers_add_root_sum_square_on_either_side() -> None:
    margin = found(readout("100 ± 10 mK", "60 ± 3 ueV"), "readout")
    middle = alone(readout("100 mK"), "readout")
    falls = [alone(readout("110 mK"), "readout") - middle, alone(readout("100 mK", "57 ueV"), "readout") - middle]
    rises = [alone(readout("90 mK"), "readout") - middle, alone(readout("100 mK", "63 ueV"), "readout") - middle]
    assert margin.low == pytest.approx(middle - np.linalg.norm(falls), rel=1e-12)
    assert margin.high == pytest.approx(middle + np.linalg.norm(rises), rel=1e-12)


def test_a_component_of_a_vector_and_one_qubit_alone_are_moved() -> None:
    valley = found({"qubit.Q1.valley_splitting": "150 ± 10 ueV"}, "valley")
    assert valley.low == pytest.approx(alone({"qubit.Q1.valley_splitting": "140 ueV"}, "valley"), rel=1e-12)
    local = found({"qubit.Q1.local_field": "10 ± 2, 0 ± 0, 0 ± 0 mT"}, "valley")
    assert local.low == pytest.approx(alone({"qubit.Q1.local_field": "12, 0, 0 mT"}, "valley"), rel=1e-9)


def test_exact_and_unconcerned_margins_have_no_range() -> None:
    margin = found(readout("100 mK"), "readout")
    assert margin.low == margin.value == margin.high
    other = found(readout("100 ± 10 mK"), "rating")
    assert other.low == other.value == other.high


@pytest.mark.parametrize(("tolerance", "verdict"), [("15", "clear"), ("45", "tight")])
def test_clear_is_tight_where_it_may_be_short_and_the_note_names_the_given(tolerance: str, verdict: str) -> None:
    margin = found(readout(f"100 ± {tolerance} mK"), "readout")
    assert margin.value is not None
    assert margin.low is not None
    assert margin.value > 1.25
    assert (margin.low < 1) is (verdict == "tight")
    assert margin.verdict == verdict
    assert margin.note == ("may be short: chip.electron_temperature decides" if verdict == "tight" else "")


def test_the_note_names_the_number_that_takes_most() -> None:
    margin = found(readout("100 ± 1 mK", "60 ± 30 ueV"), "readout")
    assert (margin.verdict, margin.note) == ("tight", "may be short: workload.blockade_window decides")


def test_a_typed_tolerance_never_softens_a_short_margin() -> None:
    margin = found(readout("150 ± 60 mK"), "readout")
    assert margin.value is not None
    assert margin.high is not None
    assert margin.value < 1 < margin.high
    assert (margin.verdict, margin.note) == ("short", "")


def test_a_default_nobody_typed_softens_a_short_margin_and_is_named() -> None:
    # driven drift: 0.5 to 20 ppm/h where it is not typed; an interval that makes the default short
    changed: dict[str, Entry] = {"magnet.mode": "driven", "calibration.interval": "10 h", "magnet.drift_driven": None}
    margin = found(changed, "drift")
    assert margin.value is not None
    assert margin.high is not None
    assert margin.value < 1
    best = alone({**changed, "magnet.drift_driven": "0.5 ppm/h"}, "drift")
    assert margin.high == pytest.approx(best, rel=1e-6)
    expected = ("tight", "may be met: type magnet.drift_driven first") if best >= 1 else ("short", "")
    assert (margin.verdict, margin.note) == expected
    assert found({**changed, "magnet.drift_driven": "4 ± 3.5 ppm/h"}, "drift").verdict == "short"


def test_few_nuclei_range_from_a_thirtieth_of_the_bound() -> None:
    few: dict[str, Entry] = {"model.nuclei": 1000, "model.spinful_fraction": "1 %", "model.barrier_nuclei": "1e5"}
    evaluation = evaluated(few)
    low, high = evaluation.range_of("noise.nuclear")
    nuclear = of(evaluation, "noise.nuclear")
    assert float(low[0]) == pytest.approx(nuclear / 30, rel=1e-9)
    # upwards the range of the 29Si coupling, 4.3 to 5.1 ueV
    assert float(high[0]) == pytest.approx(nuclear * 5.1 / 4.3, rel=1e-3)


def test_few_nuclei_soften_a_short_wait() -> None:
    few: dict[str, Entry] = {"model.nuclei": 1000, "model.spinful_fraction": "1 %", "workload.longest_wait": "0.3 us"}
    margin = found(few, "wait")
    assert margin.value is not None
    assert margin.high is not None
    assert margin.value < 1 < margin.high
    assert margin.verdict == "tight"
    assert "few nuclei" in margin.note
    measured = found({**few, "qubit.Q1.nuclear_noise": "5 MHz"}, "wait")
    assert measured.verdict == "short"


def test_changes_are_the_largest_fall_and_rise_of_each_number() -> None:
    values = np.array(
        [[10.0], [8.0], [11.0], [12.0], [13.0], [np.nan], [9.0]]
    )  # the plan, then three numbers' two ends
    fall, rise = changes(values, 3)
    np.testing.assert_array_equal(fall[:, 0], [-2.0, 0.0, -1.0])
    np.testing.assert_array_equal(rise[:, 0], [1.0, 3.0, 0.0])
    np.testing.assert_allclose(root_sum_square(rise), np.sqrt(10.0))
    untouched = changes(values[:1], 3)
    assert not np.any(untouched)


def test_wide_falls_end_at_their_factors_together() -> None:
    # 100 down to 10 by one and to 50 by another: root-sum-square would pass below zero, the factors make 5
    low = low_end(row(100.0), np.array([[-90.0], [-50.0]]))
    np.testing.assert_allclose(low, [5.0])
    np.testing.assert_allclose(low_end(row(100.0), np.array([[-3.0], [-4.0]])), [95.0])
