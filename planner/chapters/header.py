"""Top level of a plan: which device and cooldown, what for, and how far it has come."""

from __future__ import annotations

from dataclasses import dataclass

from planner.declare import Chapter, Form, Missing, Nature, Typed, Word, given
from planner.kinds import COUNT, NUMBER

PASSED = {
    "none": "nothing is fixed yet",
    "wafer": "the wafer is chosen and processed",
    "bonding": "the chip is packaged and bonded",
    "closing": "the vacuum can is closed",
    "cooling": "the device is cold",
    "ramp": "the magnet has been ramped and its mode is set",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Header(Chapter):
    """Givens of the top level."""

    format: Typed = given(
        COUNT,
        "version of the file format",
        Nature.FACT,
        missing=Missing.REQUIRED,
        least=1,
        most=1,
        example="1",
        sensible="1",
    )
    device: Word = given(Form.TEXT, "name of the device", Nature.FACT, missing=Missing.OFF, example="SQ6-03")
    title: Word = given(
        Form.TEXT,
        "one line that says what this plan is",
        Nature.FACT,
        missing=Missing.OFF,
        example="six electrons, first long sequence",
    )
    goal: Word = given(
        Form.TEXT,
        "what the run is for, in one sentence",
        Nature.DEMAND,
        missing=Missing.OFF,
        example="500 gates on every qubit",
    )
    note: Word = given(
        Form.TEXT,
        "anything else that a colleague should read",
        Nature.FACT,
        missing=Missing.OFF,
        example="gate 4 is slow",
    )
    cooldown: Typed = given(
        COUNT, "cooldown number of this device", Nature.FACT, missing=Missing.OFF, least=1, example="14"
    )
    fridge_run: Word = given(
        Form.TEXT, "run of the cryostat; joins plans that share it", Nature.FACT, missing=Missing.OFF, example="R31-02"
    )
    closing_date: Word = given(
        Form.DATE, "day on which the vacuum can is closed", Nature.FACT, missing=Missing.OFF, example="2027-02-01"
    )
    passed: Word = given(
        Form.CHOICE,
        "last moment that is behind us; choices that lock by then are fixed",
        Nature.FACT,
        missing=Missing.DEFAULT,
        default="wafer",
        options=PASSED,
        example="bonding",
    )
    wanted_margin: Typed = given(
        NUMBER,
        "margin from which a bound counts as clear",
        Nature.DEMAND,
        missing=Missing.DEFAULT,
        default="1.25",
        least=1,
        most=100,
        example="1.25",
        sensible="1.1 to 3",
    )
