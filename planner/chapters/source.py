"""The microwave source: its band and the tones made from it."""

from __future__ import annotations

from dataclasses import dataclass

from planner.declare import Chapter, Compare, Derived, Limit, Lock, Missing, Nature, Per, Typed, given, word
from planner.kinds import FREQUENCY, POWER, RATIO
from planner.physics import tones


@dataclass(frozen=True, slots=True, kw_only=True)
class Source(Chapter):
    """Givens of the source."""

    low: Typed = given(
        FREQUENCY,
        "lower edge of the usable band",
        Nature.CHOICE,
        locks=Lock.CLOSING,
        above=0,
        example="1 GHz",
        sensible="0.1 to 8 GHz",
    )
    high: Typed = given(
        FREQUENCY,
        "upper edge of the usable band",
        Nature.CHOICE,
        locks=Lock.CLOSING,
        above=0,
        example="18 GHz",
        sensible="6 to 44 GHz",
    )
    guard: Typed = given(
        FREQUENCY,
        "distance that every line keeps from the edges of the band",
        Nature.DEMAND,
        missing=Missing.DEFAULT,
        default="50 MHz",
        least=0,
        example="50 MHz",
        sensible="20 to 100 MHz",
    )
    lo: Typed = given(
        FREQUENCY,
        "local oscillator; unset: found so that it and all images stay clear of the qubits",
        Nature.CHOICE,
        locks=Lock.OPEN,
        missing=Missing.FOUND,
        above=0,
        example="16.165 GHz",
    )
    if_half_width: Typed = given(
        FREQUENCY,
        "usable half width around the local oscillator",
        Nature.CHOICE,
        locks=Lock.CLOSING,
        missing=Missing.DEFAULT,
        default="500 MHz",
        above=0,
        most=5e9,
        example="500 MHz",
        sensible="100 to 1000 MHz",
    )
    image: Typed = given(
        RATIO,
        "power of the image beside the wanted tone, after correction",
        Nature.FACT,
        missing=Missing.DEFAULT,
        default="-40 dB",
        below=1,
        example="-40 dB",
        sensible="-70 to -30 dB",
    )
    leakage: Typed = given(
        RATIO,
        "power of the leaking local oscillator beside the wanted tone, after correction",
        Nature.FACT,
        missing=Missing.DEFAULT,
        default="-40 dB",
        below=1,
        example="-40 dB",
        sensible="-70 to -30 dB",
    )
    power: Typed = given(
        POWER,
        "most that the source can deliver",
        Nature.CHOICE,
        locks=Lock.CLOSING,
        above=0,
        example="16 dBm",
        sensible="0 to 20 dBm",
    )


DERIVEDS = (
    Derived(
        "source.lo",
        tones.local_oscillator,
        {"frequency": "larmor.frequency", "in_use": word("qubit.role", "use"), "half_width": "source.if_half_width"},
        per=Per.PLAN,
        digits=5,
        help="local oscillator nearest to the middle of the qubits that stays clear of them, with all images",
    ),
    Derived(
        "source.band_distance",
        tones.band_distance,
        {"frequency": "larmor.frequency", "low": "source.low", "high": "source.high"},
        shown=False,
    ),
    Derived(
        "source.band_need",
        tones.band_need,
        {"guard": "source.guard", "search_window": "larmor.search_window"},
        shown=False,
    ),
)

LIMITS = (
    Limit(
        "band",
        "every line lies inside the source's band, a guard and its search window away from the edges",
        (
            Compare(
                "source.band_distance",
                "source.band_need",
                FREQUENCY,
                gap="{allowed} {unit} inside the band, {expected} wanted",
            ),
        ),
    ),
)
