"""Rows beside the qubits: coils, pairs, phase noise, stages, lines and parts."""

from __future__ import annotations

from dataclasses import dataclass

from planner.declare import Chapter, Form, Lock, Missing, Nature, Typed, Word, given
from planner.kinds import (
    COUNT,
    CURRENT,
    FIELD,
    FIELD_PER_CURRENT,
    FRACTION,
    FREQUENCY,
    FREQUENCY_NOISE,
    NUMBER,
    PHASE_LEVEL,
    POWER,
    RATIO,
    TEMPERATURE,
    TIME,
)

COIL_MODES = {
    "driven": "the supply stays on",
    "persistent": "the current circulates without the supply",
    "off": "no current",
}
LINE_TYPES = {"coax": "coaxial line for drive or fast gates", "rf": "line of the readout", "dc": "slow line of a loom"}
MUST = {"any": "no matter", "superconduct": "must stay superconducting", "be normal": "must stay normal"}


@dataclass(frozen=True, slots=True, kw_only=True)
class Coil(Chapter):
    """One coil of the magnet, directions in the chip frame with the mount's tilt included."""

    name: Word = given(Form.TEXT, "name of the coil", Nature.FACT, missing=Missing.REQUIRED, example="z")
    direction: Typed = given(
        NUMBER,
        "direction of its field in the chip frame, of any length",
        Nature.CHOICE,
        locks=Lock.CLOSING,
        sizes=(3,),
        nonzero=True,
        example="1, 0, 0.014",
    )
    rating: Typed = given(
        FIELD, "largest field of this coil", Nature.CHOICE, locks=Lock.CLOSING, above=0, example="6 T"
    )
    field_per_current: Typed = given(
        FIELD_PER_CURRENT,
        "field per current, with its sign",
        Nature.CHOICE,
        locks=Lock.CLOSING,
        example="70 mT/A",
    )
    step: Typed = given(
        CURRENT,
        "smallest step of the current",
        Nature.CHOICE,
        locks=Lock.CLOSING,
        missing=Missing.OFF,
        above=0,
        example="0.1 mA",
    )
    mode: Word = given(
        Form.CHOICE,
        "how its current flows; unset: as magnet.mode",
        Nature.CHOICE,
        locks=Lock.RAMP,
        missing=Missing.OFF,
        options=COIL_MODES,
        example="off",
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class Pair(Chapter):
    """Two qubits with an exchange gate."""

    name: Word = given(Form.TEXT, "name of the pair", Nature.FACT, missing=Missing.REQUIRED, example="Q1Q2")
    first: Word = given(Form.TEXT, "name of its first qubit", Nature.FACT, missing=Missing.REQUIRED, example="Q1")
    second: Word = given(Form.TEXT, "name of its second qubit", Nature.FACT, missing=Missing.REQUIRED, example="Q2")
    exchange: Typed = given(
        FREQUENCY, "exchange at the working point", Nature.CHOICE, locks=Lock.OPEN, above=0, example="5 MHz"
    )
    exchange_noise: Typed = given(
        FREQUENCY_NOISE,
        "1/f amplitude of the exchange at 1 Hz",
        Nature.FACT,
        least=0,
        example="20 kHz/rtHz",
    )
    residual_exchange: Typed = given(
        FREQUENCY,
        "exchange that is left when it is off",
        Nature.FACT,
        missing=Missing.DEFAULT,
        default="0 Hz",
        least=0,
        example="10 kHz",
    )
    gate_time: Typed = given(
        TIME, "duration of one exchange gate", Nature.CHOICE, locks=Lock.OPEN, above=0, example="100 ns"
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class PhaseNoise(Chapter):
    """One point of the source's phase noise."""

    offset: Typed = given(
        FREQUENCY,
        "offset from the carrier",
        Nature.FACT,
        missing=Missing.REQUIRED,
        above=0,
        example="1 kHz",
    )
    level: Typed = given(
        PHASE_LEVEL,
        "single-sideband level there",
        Nature.FACT,
        missing=Missing.REQUIRED,
        example="-92 dBc/Hz",
    )
    carrier: Typed = given(
        FREQUENCY,
        "carrier at which it was stated",
        Nature.FACT,
        missing=Missing.REQUIRED,
        above=0,
        example="10 GHz",
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class Stage(Chapter):
    """One temperature stage of the cryostat, listed from warm to cold."""

    name: Word = given(Form.TEXT, "name of the stage", Nature.FACT, missing=Missing.REQUIRED, example="mixing chamber")
    temperature: Typed = given(TEMPERATURE, "working temperature", Nature.FACT, above=0, most=400, example="18 mK")
    cooling_power: Typed = given(POWER, "cooling power at that temperature", Nature.FACT, above=0, example="12 uW")
    base_load: Typed = given(POWER, "heat that is there without any drive", Nature.FACT, least=0, example="2 uW; guess")


@dataclass(frozen=True, slots=True, kw_only=True)
class Line(Chapter):
    """One kind of line and its attenuators, stage by stage."""

    name: Word = given(Form.TEXT, "name of the line", Nature.FACT, missing=Missing.REQUIRED, example="drive")
    type: Word = given(
        Form.CHOICE,
        "kind of line",
        Nature.CHOICE,
        locks=Lock.CLOSING,
        missing=Missing.DEFAULT,
        default="coax",
        options=LINE_TYPES,
        example="dc",
    )
    count: Typed = given(
        COUNT,
        "how many alike",
        Nature.CHOICE,
        locks=Lock.CLOSING,
        missing=Missing.DEFAULT,
        default="1",
        least=1,
        most=1e6,
        example="13",
    )
    attenuation: Typed = given(
        RATIO,
        "attenuators, one dB value per stage from warm to cold",
        Nature.CHOICE,
        sizes=tuple(range(1, 13)),
        per_stage=True,
        locks=Lock.CLOSING,
        example="0, 20, 0, 6, 3 dB",
    )
    cable_loss: Typed = given(
        RATIO,
        "loss of the cables, before the first stage",
        Nature.FACT,
        missing=Missing.DEFAULT,
        default="0 dB",
        least=1,
        example="9 dB",
    )
    source_temperature: Typed = given(
        TEMPERATURE,
        "noise temperature of what feeds the line",
        Nature.FACT,
        missing=Missing.DEFAULT,
        default="300 K",
        above=0,
        example="300 K",
    )
    device_power: Typed = given(
        POWER,
        "power wanted at the device",
        Nature.CHOICE,
        locks=Lock.OPEN,
        missing=Missing.OFF,
        above=0,
        example="-27 dBm",
    )
    duty: Typed = given(
        FRACTION,
        "share of the time that the line is driven",
        Nature.CHOICE,
        locks=Lock.OPEN,
        missing=Missing.DEFAULT,
        default="1",
        above=0,
        most=1,
        example="0.15",
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class Part(Chapter):
    """A superconducting part near the chip."""

    name: Word = given(Form.TEXT, "name of the part", Nature.FACT, missing=Missing.REQUIRED, example="readout inductor")
    critical_in_plane: Typed = given(FIELD, "critical field in the chip plane", Nature.FACT, above=0, example="2 T")
    critical_normal: Typed = given(
        FIELD, "critical field along the chip normal", Nature.FACT, above=0, example="100 mT"
    )
    must: Word = given(
        Form.CHOICE,
        "what it must stay",
        Nature.DEMAND,
        missing=Missing.DEFAULT,
        default="any",
        options=MUST,
        example="superconduct",
    )
