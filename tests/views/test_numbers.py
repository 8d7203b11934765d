"""Numbers as text: digits, units, margins that never round up to 1."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from planner.kinds import ENERGY, FIELD, FRACTION, FREQUENCY, RATIO, TIME, parse
from planner.views.numbers import (
    best_unit,
    digits,
    margin_text,
    number_in,
    plain,
    understood,
    with_unit,
    without_origin,
)


@pytest.mark.parametrize(
    ("value", "count", "text"),
    [
        (0.0, 3, "0"),
        (1.0, 3, "1.00"),
        (13.88567, 5, "13.886"),
        (-0.5, 3, "-0.500"),
        (123456.0, 3, "123000"),
        (999.6, 3, "1000"),
        (0.0099996, 3, "0.0100"),
        (1234567.0, 3, "1.23e6"),
        (1e6, 3, "1e6"),
        (2.5e-7, 3, "2.5e-7"),
        (1e-11, 3, "1e-11"),
    ],
)
def test_significant_digits(value: float, count: int, text: str) -> None:
    assert digits(value, count) == text


@pytest.mark.parametrize(
    ("value", "text"), [(1.0, "1"), (0.25, "0.25"), (400.0, "400"), (100.4, "100"), (1e-11, "1e-11")]
)
def test_plain_numbers_end_with_a_digit_that_matters(value: float, text: str) -> None:
    assert plain(value, 3) == text


@given(st.floats(-1e12, 1e12).filter(lambda value: abs(value) > 1e-15), st.integers(2, 7))
def test_a_shown_number_is_the_number_to_its_digits(value: float, count: int) -> None:
    for show in (digits, plain):
        assert math.isclose(float(show(value, count)), value, rel_tol=0.5000001 * 10 ** (1 - count))


@pytest.mark.parametrize(
    ("kind", "value", "unit"),
    [
        (FIELD, 0.35, "mT"),
        (FIELD, 1.0, "T"),
        (FIELD, 2e-9, "nT"),
        (FREQUENCY, 1.4e9, "GHz"),
        (FREQUENCY, 999e6, "MHz"),
        (TIME, 1e-6, "us"),
    ],
)
def test_the_unit_in_which_a_value_reads_best(kind: object, value: float, unit: str) -> None:
    assert best_unit(kind, value) == unit  # type: ignore[arg-type]


def test_values_without_a_number_and_pure_numbers() -> None:
    assert with_unit(FIELD, None) == with_unit(FIELD, float("nan")) == number_in(FIELD, None, "T") == "?"
    assert with_unit(FIELD, 0.35) == "350 mT"
    assert with_unit(FRACTION, 1e-11) == "1e-11"
    assert with_unit(ENERGY, 1.602176634e-19 * 8e-6, "ueV") == "8 ueV"  # CODATA 2022: exact since 2019
    assert number_in(FREQUENCY, 13.88567e9, "GHz", 5) == "13.886"
    assert with_unit(RATIO, 1e-4, "dB") == "-40 dB"


@pytest.mark.parametrize(
    ("margin", "text"),
    [
        (None, "?"),
        (0.0, "0.00"),
        (0.342, "0.34"),
        (0.999, "0.99"),
        (0.9999999, "0.99"),
        (1.0, "1.00"),
        (1.004, "1.00"),
        (9.994, "9.99"),
        (22.94, "22.9"),
        (2644.2, "2644"),
        (1e6, "1e6"),
        (5e6, "1e6"),
    ],
)
def test_margins(margin: float | None, text: str) -> None:
    assert margin_text(margin) == text


@given(st.floats(0, 1, exclude_max=True))
def test_a_short_margin_never_reads_as_met(margin: float) -> None:
    assert float(margin_text(margin)) < 1


@pytest.mark.parametrize(
    ("kind", "text", "sizes", "read"),
    [
        (FIELD, "350 mT", (1,), "0.35 T"),
        (FIELD, "650 mT ± 1 %; drawing", (1,), "0.65 ± 6.5e-3 T"),
        (FRACTION, "1e-11", (1,), "1e-11"),
        (FIELD, "146, 0, 8 ± 3 mT", (3,), "0.146, 0, 8e-3 ± 3e-3 T"),
        (FREQUENCY, "2 MHz", (1,), "2e6 Hz"),
    ],
)
def test_what_is_understood_of_a_text(kind: object, text: str, sizes: tuple[int, ...], read: str) -> None:
    quantity = parse(kind, text, sizes=sizes)  # type: ignore[arg-type]
    assert understood(kind, quantity) == read  # type: ignore[arg-type]
    assert without_origin(quantity) == text.partition(";")[0].rstrip()
