"""Quantities: the shared table of texts, the unit table against pint, and what holds for any text."""

from __future__ import annotations

import datetime
import math
import subprocess
import sys
import tomllib
from pathlib import Path
from typing import Any

import numpy as np
import pint
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from planner import kinds, unitstable
from planner.kinds import (
    ANGLE,
    COUNT,
    DRIFT,
    FIELD,
    FRACTION,
    FREQUENCY,
    KINDS,
    NUMBER,
    PHASE_LEVEL,
    POWER,
    RATIO,
    TEMPERATURE,
    TIME,
    Kind,
    Quantity,
    QuantityError,
    clean,
    from_toml,
    in_unit,
    parse,
)  # fmt: skip

ROOT = Path(__file__).parents[1]
TABLE = tomllib.loads((Path(__file__).parent / "data" / "quantities.toml").read_text(encoding="utf-8"))
BY_NAME = {kind.name: kind for kind in KINDS}
LINEAR = [(kind, unit) for kind in KINDS for unit in kind.units if not kind.units[unit].level]

steady = settings(deadline=None, database=None, derandomize=True)


def flat(value: Any) -> list[float | None]:
    return list(value) if isinstance(value, tuple | list) else [value]


def refusal(kind: Kind, text: str, **options: Any) -> str:
    with pytest.raises(QuantityError) as caught:
        parse(kind, text, **options)
    return str(caught.value)


# -- the table shared with readers in other languages


@pytest.mark.parametrize("row", TABLE["accepted"], ids=lambda row: row["text"])
def test_accepted(row: dict[str, Any]) -> None:
    read = parse(BY_NAME[row["kind"]], row["text"], sizes=tuple(row.get("sizes", (1,))))
    assert isinstance(read.value, tuple) == isinstance(row["value"], list)
    assert flat(read.value) == pytest.approx(flat(row["value"]), rel=1e-15)
    tolerance = row.get("tolerance")
    assert isinstance(read.tolerance, tuple) == isinstance(tolerance, list)
    assert flat(read.tolerance) == (pytest.approx(flat(tolerance), rel=1e-14) if tolerance is not None else [None])
    assert (read.unit, read.origin) == (row["unit"], row.get("origin", ""))


@pytest.mark.parametrize("row", TABLE["refused"], ids=lambda row: row["text"])
def test_refused(row: dict[str, Any]) -> None:
    assert refusal(BY_NAME[row["kind"]], row["text"], sizes=tuple(row.get("sizes", (1,)))) == row["error"]


# -- units


def test_every_kind_has_its_section_and_its_constant() -> None:
    constants = {value for value in vars(kinds).values() if isinstance(value, Kind)}
    assert constants == set(KINDS)
    assert [kind.name for kind in KINDS] == list(unitstable.UNITS)


@pytest.mark.parametrize(("kind", "first", "last"), [
    (FIELD, "mT", "nT"), (TIME, "us", "day"), (FREQUENCY, "Hz", "GHz"), (POWER, "dBm", "pW"), (FRACTION, "", "ppb"),
])  # fmt: skip
def test_units_keep_their_order(kind: Kind, first: str, last: str) -> None:
    assert (kind.first_unit, list(kind.units)[-1]) == (first, last)


@pytest.mark.parametrize("kind", KINDS, ids=lambda kind: kind.name)
def test_aliases_lead_to_listed_units_and_hide_none(kind: Kind) -> None:
    assert set(kind.aliases.values()) <= set(kind.units)
    assert not set(kind.aliases) & set(kind.units)


@pytest.fixture(scope="module")
def registry() -> Any:
    """Pint as it comes, in floats: not the registry that wrote the table."""
    made: Any = pint.UnitRegistry()
    made.define("ppb = 1e-9")
    made.define("rtHz = hertz ** 0.5")
    return made


def by_pint(registry: Any, unit: str) -> Any:
    expression = unit.replace("%", "percent").replace("^", "**")
    return registry.Quantity(1.0, f"1{expression}" if expression.startswith("/") else expression or "dimensionless")


@pytest.mark.parametrize(("kind", "unit"), LINEAR, ids=lambda part: part if isinstance(part, str) else part.name)
def test_factor_is_that_of_pint(registry: Any, kind: Kind, unit: str) -> None:
    expected = by_pint(registry, unit).to(by_pint(registry, kind.si.removeprefix("1") or "").units).magnitude
    assert float(kind.units[unit].factor) == pytest.approx(expected, rel=1e-12)


@pytest.mark.parametrize(("kind", "unit", "expected"), [  # 10 lg of a power ratio; dBm is over 1 mW (ITU-R V.574, from memory)
    (RATIO, "dB", 1.0), (POWER, "dBm", 1e-3), (PHASE_LEVEL, "dBc/Hz", 1.0),
])  # fmt: skip
def test_levels_are_powers_of_ten(kind: Kind, unit: str, expected: float) -> None:
    assert parse(kind, f"0 {unit}").value == expected
    assert parse(kind, f"-30 {unit}").value == pytest.approx(expected / 1000, rel=1e-15)
    assert parse(kind, f"3 {unit}").value == pytest.approx(1.9952623149688797 * expected, rel=1e-15)  # 10^0.3


def test_table_is_what_its_command_writes() -> None:
    written = unitstable.TABLE.read_text(encoding="utf-8")
    assert "python -m planner.unitstable" in written
    assert tomllib.loads(written) == tomllib.loads(unitstable.table())


def test_import_and_listed_units_load_neither_pint_nor_numpy() -> None:
    code = (
        "import sys; from planner.kinds import FIELD, parse; parse(FIELD, '0.65 ± 0.002 T')\n"
        "assert not {'pint', 'numpy'} & set(sys.modules), 'loaded'"
    )
    subprocess.run([sys.executable, "-c", code], cwd=ROOT, check=True)


# -- units outside the table


@pytest.mark.parametrize("text", ["5 m", "5 u", "5 MT", "5 m/s", "5 T T", "5 T**2", f"5 {'q' * 25}", "5 délai"])
def test_pint_is_not_asked_for(monkeypatch: pytest.MonkeyPatch, text: str) -> None:
    asked: list[str] = []
    monkeypatch.setattr(kinds, "_pint_unit", lambda name, si: asked.append(name))
    refusal(FIELD, text)
    assert asked == []


def test_kinds_that_do_not_ask_pint_refuse() -> None:
    assert refusal(FREQUENCY, "5 THz") == "'THz' is not a unit of frequency: use Hz, kHz, MHz, GHz"
    assert refusal(ANGLE, "1 turn") == "'turn' is not a unit of angle: use deg, rad, mrad"


@pytest.mark.parametrize("failure", [AssertionError, RecursionError, ZeroDivisionError, ImportError])
def test_failing_pint_is_a_plain_refusal(monkeypatch: pytest.MonkeyPatch, failure: type[Exception]) -> None:
    def fail(unit: str, si: str) -> None:
        raise failure

    kinds._pint_unit.cache_clear()
    monkeypatch.setattr(unitstable, "factor", fail)
    assert refusal(TIME, "2 weeks") == "'weeks' is not a unit of time: use us, ns, ms, s, min, h, day"
    kinds._pint_unit.cache_clear()


def test_unit_of_pint_is_understood_when_shown() -> None:
    assert in_unit(TIME, parse(TIME, "2 weeks").value, "weeks") == 2.0  # type: ignore[arg-type]


# -- texts


@pytest.mark.parametrize(("text", "assume", "kept"), [
    ("350", "mT", "350 mT"),
    ("350 ± 2; guess", "mT", "350 ± 2 mT; guess"),
    ("350(2)", "mT", "350(2) mT"),
    ("350 ± 1 %", "mT", "350 mT ± 1 %"),
    ("146, 0, 8", "mT", "146, 0, 8 mT"),
    ("146 ± 3, 0 ± 1, 8 ± 1;drawing", "uT", "146 ± 3, 0 ± 1, 8 ± 1 uT;drawing"),
    (" 350 ; datasheet", "mT", " 350 mT ; datasheet"),
    ("0.35 T", "mT", "0.35 T"),
])  # fmt: skip
def test_assumed_unit_is_added_to_the_text(text: str, assume: str, kept: str) -> None:
    assumed = parse(FIELD, text, sizes=(1, 3), assume=assume)
    assert assumed == parse(FIELD, kept, sizes=(1, 3))
    assert assumed.text == kept


def test_assumed_unit_of_a_fraction() -> None:
    assert parse(FRACTION, "800", assume="ppm").text == "800 ppm"
    assert parse(FRACTION, "800 ± 5 %", assume="ppm").text == "800 ± 5 %"


@pytest.mark.parametrize(("typed", "kept"), [
    ("1e6", "1000000"), (" 20 ", "20"), ("1.5e1", "15"), ("4e5; estimate", "400000; estimate"), ("-0", "0"),
    ("4e5 ± 1e5", "4e5 ± 1e5"),
])  # fmt: skip
def test_counts_are_written_out(typed: str, kept: str) -> None:
    assert parse(COUNT, typed).text == kept


@pytest.mark.parametrize(("origin", "expected"), [
    ("measured CD12", "measured"), ("Measured: CD12", "measured"), ("(datasheet) p. 3", "datasheet"),
    ("DRAWING, sheet 2", "drawing"), ("estimate", "estimate"), ("a guess", "other"), ("guesses", "other"),
    ("guess; not measured", "guess"), ("CD12", "other"), ("", "other"), ("...", "other"),
])  # fmt: skip
def test_origin_class(origin: str, expected: str) -> None:
    assert parse(FIELD, f"420 mT; {origin}").origin_class == expected


def test_text_longer_than_80_characters_is_refused_before_the_semicolon() -> None:
    fits = "0." + "1" * 76 + " T"
    assert parse(FIELD, fits + "; " + "x" * 500).value == pytest.approx(1 / 9, rel=1e-15)
    assert refusal(FIELD, fits + " ") == f"'{fits[:60]}...' is 81 characters long: at most 80 are read before a ';'"


@pytest.mark.parametrize("text", [
    "9**9**9", "9**9**9 m", "1" * 100_000 + " m", "1 " + "m" * 100_000, "(" * 2000 + "1", "-" * 5000 + "1",
    "1" + "*m" * 3000,
    "1,5 m", "8.0(4) m ", "1 m # x", "1 \x00 mT", "1 mT == 1 mT", "1 mT\u202e", "1e999", "nan", "inf mT", "1e-400 mT",
    "250 MT", "1 mt", "1 mM", "1 G", "1 h", "1 a", "1 k", "1 c", "1 e", "20 degC", "-30 dBm",
    "__import__('os').system('x')",
    "1 m.__class__", "sin(1)", "m**1e999", "1 mT\ud800", "٣ mT", "1²", "1 ± mT", "± 1 mT", "1e mT", "0x10 mT", "1 mT ±",
], ids=lambda text: ascii(text[:20]))  # fmt: skip
def test_hostile_texts_are_refused_in_one_short_line(text: str) -> None:
    message = refusal(FIELD, text, sizes=(1, 3))
    assert len(message) < 250
    assert message == clean(message)


def test_clean_shows_what_hides() -> None:
    assert clean("Q1 'µ' ± Å 量子") == "Q1 'µ' ± Å 量子"
    hidden = "\x00\x1b\x7f\x9b\n\t\u200b\u200d\u202e\u2066\ufeff\u00ad\u2028\ufe0f\u3164\ud800"
    assert clean(f"a{hidden}b") == "a" + "\ufffd" * len(hidden) + "b"


# -- values of a TOML file


@pytest.mark.parametrize(("kind", "raw", "text"), [
    (COUNT, 20, "20"), (COUNT, 1e6, "1000000"), (COUNT, "4e5; estimate", "400000; estimate"), (NUMBER, 2, "2"),
    (NUMBER, 2.0023, "2.0023"), (FRACTION, 1e-11, "1e-11"), (FIELD, "350 mT", "350 mT"),
])  # fmt: skip
def test_from_toml(kind: Kind, raw: object, text: str) -> None:
    assert from_toml(kind, raw) == parse(kind, text)


@pytest.mark.parametrize(("kind", "raw", "error"), [
    (FIELD, 350, '350 has no unit: write a text in quotes, such as "0.5 mT"'),
    (FIELD, 0.35, '0.35 has no unit: write a text in quotes, such as "0.5 mT"'),
    (FIELD, True, 'true or false is no quantity: write a text in quotes, such as "0.5 mT"'),
    (COUNT, False, 'true or false is no quantity: write a text in quotes, such as "5"'),
    (FIELD, {"value": 1}, 'a table is no quantity: write a text in quotes, such as "0.5 mT"'),
    (FIELD, datetime.date(2027, 2, 8), 'a date or time is no quantity: write a text in quotes, such as "0.5 mT"'),
    (NUMBER, math.nan, "'nan' is not a number to plan with: write a finite number, or leave it out"),
    (NUMBER, -math.inf, "'-inf' is not a number to plan with: write a finite number, or leave it out"),
    pytest.param(COUNT, 10**5000, "a whole number beyond 1e18 is too large: write a smaller one", id="5001 digits"),
    (COUNT, 2.5, "'2.5' is not a count: write a whole number from 0 to 1e18"),
])  # fmt: skip
def test_from_toml_refuses(kind: Kind, raw: object, error: str) -> None:
    with pytest.raises(QuantityError) as caught:
        from_toml(kind, raw)
    assert str(caught.value) == error


def test_a_list_is_told_how_to_be_a_vector() -> None:
    with pytest.raises(QuantityError, match='^a list is no quantity: write a text in quotes, such as "3, 0, 8 mT"$'):
        from_toml(FIELD, [146, 0, 8], sizes=(1, 3))


# -- results in a unit


@pytest.mark.parametrize(("kind", "si", "unit", "expected"), [
    (FIELD, 0.42, "mT", 420.0), (FIELD, 1e-4, "uT", 100.0), (FRACTION, 0.05, "%", 5.0), (DRIFT, 1e-8, "ppm/h", 36.0),
    (ANGLE, math.pi, "deg", 180.0), (POWER, 1e-6, "dBm", -30.0), (RATIO, 1e-4, "dBc", -40.0), (FIELD, 3e-5, "µT", 30.0),
    (TEMPERATURE, np.float64(0.095), "mK", 95.0), (FREQUENCY, -5e9, "GHz", -5.0),
])  # fmt: skip
def test_in_unit(kind: Kind, si: float, unit: str, expected: float) -> None:
    assert in_unit(kind, si, unit) == pytest.approx(expected, rel=1e-15)


def test_in_unit_refuses_other_units_and_levels_of_nothing() -> None:
    with pytest.raises(QuantityError, match="^'Hz' is not a unit of field: use mT, T, uT, nT$"):
        in_unit(FIELD, 1.0, "Hz")
    with pytest.raises(QuantityError, match="^0 W has no value in dBm$"):
        in_unit(POWER, 0.0, "dBm")


# -- what holds for any text

numbers = st.from_regex(r"[+-]?\d{1,9}(\.\d{0,9})?(e[+-]?\d{1,2})?", fullmatch=True, alphabet="0123456789.e+-")
origins = st.text(max_size=40).map(lambda text: f";{text}") | st.just("")
pieces = st.sampled_from([
    *"0159.,;+-±%()eE /^_\t", " ± ", "+/-", "mT", "ppm", "dBm", "rtHz", "√Hz", "µ", "nan", "1e400", "\u202e",
])  # fmt: skip
texts = st.text(max_size=100) | st.lists(pieces, max_size=16).map("".join)


@steady
@given(kind=st.sampled_from(KINDS), text=texts, sizes=st.sampled_from([(1,), (3,), (1, 3)]), assumed=st.booleans())
def test_any_text_is_read_or_refused_in_one_line(kind: Kind, text: str, sizes: tuple[int, ...], assumed: bool) -> None:
    try:
        read = parse(kind, text, sizes=sizes, assume=kind.first_unit if assumed else "")
    except QuantityError as error:
        assert str(error) and str(error) == clean(str(error))
        return
    assert all(math.isfinite(value) for value in flat(read.value) if value is not None)
    assert all(tolerance is None or tolerance >= 0 for tolerance in flat(read.tolerance))
    assert parse(kind, read.text, sizes=sizes) == read  # what is stored reads back as the same
    assert kind.whole or assumed or read.text == text


@steady
@given(part=st.sampled_from(LINEAR), number=numbers, blank=st.sampled_from(["", " ", "\t "]), origin=origins)
def test_typed_text_is_kept_byte_for_byte(part: tuple[Kind, str], number: str, blank: str, origin: str) -> None:
    kind, unit = part
    if kind.whole or unit.startswith("1/"):  # counts are written out; '51/rtHz' needs its blank
        return
    text = f"{blank}{number}{blank}{unit}{origin}"
    read = parse(kind, text)
    assert (read.text, read.origin) == (text, origin[1:].strip())
    assert read.value == pytest.approx(float(number) * float(kind.units[unit].factor), rel=1e-14)


@steady
@given(number=st.decimals(-(10**6), 10**6, places=6))
def test_one_field_in_three_units_is_one_double(number: Any) -> None:
    texts = (f"{number} mT", f"{number.scaleb(3)} uT", f"{number.scaleb(6)} nT", f"{number.scaleb(-3)} T")
    values = {parse(FIELD, text).value for text in texts}
    assert values == {float(number.scaleb(-3)) + 0.0}


def test_a_tenth_of_a_millitesla_is_a_hundred_microtesla() -> None:
    assert parse(FIELD, "0.1 mT").value == parse(FIELD, "100 uT").value == 1e-4


@steady
@given(part=st.sampled_from([(kind, unit) for kind in KINDS for unit in kind.units]), number=st.floats(1e-3, 1e3))
def test_a_number_comes_back_in_its_unit(part: tuple[Kind, str], number: float) -> None:
    kind, unit = part
    read = parse(kind, f"{round(number)} {unit}" if kind.whole else f"{number!r} {unit}")
    assert isinstance(read.value, float)
    expected = round(number) if kind.whole else number
    assert in_unit(kind, read.value, unit) == pytest.approx(expected, rel=1e-12, abs=1e-13)


@pytest.mark.parametrize("text", ["0 T", "-0 T", "-0.0e5 mT", "0e99999999999999999999 nT"])
def test_there_is_one_zero(text: str) -> None:
    assert repr(parse(FIELD, text).value) == "0.0"


def test_a_quantity_can_not_be_changed() -> None:
    read: Any = Quantity("1 T", 1.0, None, "T", "")
    with pytest.raises(AttributeError):
        read.value = 2.0
