"""The source's tones: the search for the local oscillator against one that tries everything."""

from __future__ import annotations

import numpy as np
import pytest

from planner.physics import Array, tones

from . import assert_axes_agree, row

MHZ = 1_000_000
RANDOM = np.random.default_rng(8)


def found(frequency: list[int], half_width: int, in_use: list[int] | None = None) -> float:
    use = row(*(in_use or [1] * len(frequency)))
    return float(tones.local_oscillator(frequency=row(*frequency), in_use=use, half_width=row(half_width))[0])


def tried_out(frequency: list[int], half_width: int) -> float:
    """Every tone on whole MHz within reach, by the words of the rule, in whole hertz."""
    twice_middle = min(frequency) + max(frequency)
    reach = [tone for tone in range(-100 * MHZ, 400 * MHZ, MHZ) if all(abs(tone - f) <= half_width for f in frequency)]
    clear = [tone for tone in reach if clearance(tone, frequency) >= 10 * MHZ]
    if clear:
        return min(clear, key=lambda tone: (abs(2 * tone - twice_middle), tone))
    return max(reach, key=lambda tone: (clearance(tone, frequency), -tone)) if reach else twice_middle / 2


def clearance(tone: int, frequency: list[int]) -> int:
    return min(abs(spur - f) for spur in [tone, *(2 * tone - f for f in frequency)] for f in frequency)


@pytest.mark.parametrize("count", [1, 2, 3, 5, 8, 15])
@pytest.mark.parametrize("half_width", [20, 60, 150])
@pytest.mark.parametrize("grain", [2, 500_000, MHZ])  # a coarse grain makes ties and distances of exactly 10 MHz
def test_the_search_finds_what_trying_everything_finds(count: int, half_width: int, grain: int) -> None:
    for _ in range(8):
        frequency = [int(f) * grain for f in RANDOM.integers(100 * MHZ // grain, 200 * MHZ // grain, count)]
        assert found(frequency, half_width * MHZ) == tried_out(frequency, half_width * MHZ), frequency


def test_all_kinds_of_outcome_occur_in_such_searches() -> None:
    assert tried_out([150 * MHZ], 60 * MHZ) == 140 * MHZ  # clear, the lower of equals
    assert found([150 * MHZ], 60 * MHZ) == 140 * MHZ
    crowded = list(range(100 * MHZ, 200 * MHZ, 8 * MHZ))
    assert clearance(int(found(crowded, 60 * MHZ)), crowded) < 10 * MHZ  # none clear
    assert found([100 * MHZ, 200 * MHZ], 20 * MHZ) == 150 * MHZ  # none within reach: the middle


def test_spare_qubits_do_not_move_the_oscillator() -> None:
    assert found([150 * MHZ, 140 * MHZ], 60 * MHZ, in_use=[1, 0]) == found([150 * MHZ], 60 * MHZ)


def test_an_image_on_another_qubit_is_avoided() -> None:
    # images of the outer two about the middle (200 MHz) would fall on each other
    chosen = found([100 * MHZ, 300 * MHZ], 500 * MHZ)
    assert chosen == 195 * MHZ
    assert abs(2 * chosen - 100 * MHZ - 300 * MHZ) == 10 * MHZ


def test_distance_from_the_band() -> None:
    frequency = row(0.5e9, 3e9, 17e9, 19e9)
    np.testing.assert_array_equal(
        tones.band_distance(frequency=frequency, low=row(1e9), high=row(18e9)), [-0.5e9, 2e9, 1e9, -1e9]
    )
    np.testing.assert_array_equal(tones.band_need(guard=row(50e6), search_window=row(20e6)), [70e6])


def test_intermediate_and_loose_tones() -> None:
    frequency, oscillator = row(15.9e9, 16.3e9), row(16e9)
    np.testing.assert_array_equal(tones.local_tone(oscillator=oscillator), [16e9])
    np.testing.assert_allclose(
        tones.intermediate_frequency(frequency=frequency, oscillator=oscillator), [-0.1e9, 0.3e9]
    )
    loose = {"frequency": frequency, "oscillator": oscillator}
    np.testing.assert_allclose(tones.loose_tone(**loose, carrier_is_loose=row(1.0)) + 0 * frequency, [16e9, 16e9])
    np.testing.assert_allclose(tones.loose_tone(**loose, carrier_is_loose=row(0.0)), [0.1e9, 0.3e9])


def spread(*values: float) -> Array:
    return row(*values) * MHZ


def test_axes_of_studies() -> None:
    some = spread(150, 171, 138)
    assert_axes_agree(tones.band_distance, frequency=some, low=spread(100), high=spread(1000))
    assert_axes_agree(tones.band_need, guard=spread(50), search_window=some)
    assert_axes_agree(tones.intermediate_frequency, frequency=some, oscillator=spread(150))
    assert_axes_agree(tones.loose_tone, frequency=some, oscillator=spread(150), carrier_is_loose=row(0.0))


def test_axes_of_studies_of_the_search() -> None:
    factor, in_use = np.array([[1.0], [2.0], [0.5]]), row(1, 1, 0)
    some, width = spread(150, 171, 138), spread(60)
    for frequency, half_width in ((factor * some, width), (some, factor * width), (factor * some, factor * width)):
        together = tones.local_oscillator(frequency=frequency, in_use=in_use, half_width=half_width)
        frequencies, widths = np.broadcast_to(frequency, (3, 3)), np.broadcast_to(half_width, (3, 1))
        alone = [
            tones.local_oscillator(frequency=f, in_use=in_use, half_width=w)
            for f, w in zip(frequencies, widths, strict=True)
        ]
        np.testing.assert_array_equal(together, alone)
