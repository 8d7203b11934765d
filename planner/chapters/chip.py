"""The chip as mounted: its material, its electrons' temperature, its micromagnet."""

from __future__ import annotations

from dataclasses import dataclass

from planner.declare import Ask, Chapter, Compare, Derived, Form, Limit, Lock, Missing, Nature, Per, Typed, Word, given
from planner.kinds import FIELD, FRACTION, NUMBER, TEMPERATURE
from planner.materials import material_titles
from planner.physics import wiring
from planner.switches import HAS_MICROMAGNET


@dataclass(frozen=True, slots=True, kw_only=True)
class Chip(Chapter):
    """Givens of the chip."""

    material: Word = given(
        Form.CHOICE,
        "host, carrier and isotopes; brings the bath model and its defaults",
        Nature.CHOICE,
        locks=Lock.WAFER,
        missing=Missing.REQUIRED,
        options=material_titles(),
        example="si-sige-800ppm",
    )
    electron_temperature: Typed = given(
        TEMPERATURE,
        "temperature of the electrons, not of the mixing chamber",
        Nature.FACT,
        above=0,
        most=300,
        example="95 ± 10 mK; measured CD12",
        sensible="40 to 200 mK",
    )
    drive_leak: Typed = given(
        FRACTION,
        "amplitude of a drive as the neighbours see it",
        Nature.CHOICE,
        locks=Lock.BONDING,
        missing=Missing.DEFAULT,
        default="1",
        least=0,
        most=1,
        example="0.1",
        sensible="0.01 to 1",
    )
    micromagnet_field: Typed = given(
        FIELD,
        "smallest field along the micromagnet's easy axis for a repeatable state",
        Nature.FACT,
        missing=Missing.OFF,
        above=0,
        example="250 mT",
        sensible="100 to 500 mT",
    )
    micromagnet_axis: Typed = given(
        NUMBER,
        "easy axis of the micromagnet in the chip frame",
        Nature.FACT,
        missing=Missing.DEFAULT,
        default="1, 0, 0",
        sizes=(3,),
        nonzero=True,
        example="1, 0, 0",
    )


DERIVEDS = (
    Derived(
        "chip.field_along_axis",
        wiring.field_along,
        {"set_vector": "larmor.set_vector", "axis": "chip.micromagnet_axis"},
        per=Per.PLAN,
        shown=False,
    ),
)

LIMITS = (
    Limit(
        "micromagnet",
        "the set field along the micromagnet's easy axis keeps its state repeatable",
        (
            Compare(
                "chip.field_along_axis",
                "chip.micromagnet_field",
                FIELD,
                gap="{allowed} {unit} along it, {expected} needed",
            ),
        ),
        per=Per.PLAN,
        asked=(Ask(HAS_MICROMAGNET, "no micromagnet field is stated"),),
    ),
)
