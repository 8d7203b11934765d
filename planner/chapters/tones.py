"""Tones made from the source: where images and leakage land, and what neighbours' drives do to a qubit."""

from __future__ import annotations

from planner.declare import Ask, Compare, Derived, Limit, Per, Unknown, word
from planner.kinds import FRACTION, FREQUENCY
from planner.physics import addressing, tones
from planner.switches import HAS_PARTNERS, REACHES_ALL

_IN_USE = word("qubit.role", "use")
_ALONE = Unknown("no other qubit is in use")

DERIVEDS = (
    Derived(
        "tones.lo",
        tones.local_tone,
        {"oscillator": "source.lo"},
        per=Per.PLAN,
        digits=5,
        help="local oscillator, as typed or found",
    ),
    Derived("tones.partners", addressing.partners, {"in_use": _IN_USE}, per=Per.PLAN, shown=False),
    Derived(
        "tones.intermediate",
        tones.intermediate_frequency,
        {"frequency": "larmor.frequency", "oscillator": "source.lo"},
        heading="IF",
        display="MHz",
        help="offset of the qubit from the local oscillator",
    ),
    Derived(
        "tones.reaches_all",
        addressing.reaches_all,
        {"intermediate": "tones.intermediate", "in_use": _IN_USE, "half_width": "source.if_half_width"},
        per=Per.PLAN,
        shown=False,
    ),
    Derived(
        "tones.image_distance",
        addressing.image_distance,
        {"frequency": "larmor.frequency", "oscillator": "source.lo", "in_use": _IN_USE},
        heading="image",
        display="MHz",
        unknown=_ALONE,
        help="distance of this qubit's image from the nearest other qubit in use",
    ),
    Derived(
        "tones.leakage_distance",
        addressing.offset_size,
        {"intermediate": "tones.intermediate"},
        heading="leakage",
        display="MHz",
        help="distance of the leaking oscillator",
    ),
    Derived(
        "tones.largest_rabi",
        addressing.largest_rabi,
        {"rabi_frequency": "qubit.rabi_frequency", "in_use": _IN_USE},
        per=Per.PLAN,
        shown=False,
    ),
    Derived(
        "tones.crosstalk_ratio",
        addressing.crosstalk_ratio,
        {
            "frequency": "larmor.frequency",
            "rabi_frequency": "qubit.rabi_frequency",
            "largest": "tones.largest_rabi",
            "drive_leak": "chip.drive_leak",
            "in_use": _IN_USE,
        },
        shown=False,
    ),
    Derived(
        "tones.crosstalk_flip",
        addressing.flip,
        {"ratio": "tones.crosstalk_ratio"},
        heading="crosstalk",
        help="largest flip by another qubit's drive (square pulse: an upper bound)",
    ),
    Derived(
        "tones.crosstalk_phase",
        addressing.crosstalk_phase,
        {"ratio": "tones.crosstalk_ratio", "drive_leak": "chip.drive_leak"},
        heading="x phase",
        display="rad",
        help="phase by the worst other drive during its pi pulse; deterministic, a frame update undoes it",
    ),
    Derived(
        "tones.image_ratio",
        addressing.image_ratio,
        {
            "frequency": "larmor.frequency",
            "oscillator": "source.lo",
            "rabi_frequency": "qubit.rabi_frequency",
            "largest": "tones.largest_rabi",
            "drive_leak": "chip.drive_leak",
            "image": "source.image",
            "in_use": _IN_USE,
        },
        shown=False,
    ),
    Derived(
        "tones.image_flip",
        addressing.flip,
        {"ratio": "tones.image_ratio"},
        heading="image fl.",
        help="largest flip by another qubit's image",
    ),
    Derived(
        "tones.leakage_ratio",
        addressing.leakage_ratio,
        {"offset": "tones.leakage_distance", "largest": "tones.largest_rabi", "leakage": "source.leakage"},
        shown=False,
        unknown=Unknown("the oscillator stands on the qubit"),
    ),
    Derived(
        "tones.leakage_flip",
        addressing.flip,
        {"ratio": "tones.leakage_ratio"},
        heading="leak fl.",
        help="largest flip by the leaking oscillator",
    ),
)

_FLIP_GAP = "flip {expected} of {allowed} allowed"
_PARTNERS, _REACHED = Ask(HAS_PARTNERS, "one qubit in use"), Ask(REACHES_ALL, "no oscillator reaches all qubits")

LIMITS = (
    Limit(
        "mixing",
        "one local oscillator reaches every qubit within the usable half width",
        (Compare("source.if_half_width", "tones.leakage_distance", FREQUENCY),),
    ),
    Limit(
        "crosstalk",
        "the drive of another qubit hardly flips this one",
        (Compare("workload.crosstalk_error", "tones.crosstalk_flip", FRACTION, gap=_FLIP_GAP),),
        asked=(_PARTNERS,),
    ),
    Limit(
        "image",
        "the image of another qubit's tone hardly flips this one",
        (Compare("workload.crosstalk_error", "tones.image_flip", FRACTION, gap=_FLIP_GAP),),
        asked=(_PARTNERS, _REACHED),
        quiet=True,
    ),
    Limit(
        "leakage",
        "the leaking oscillator hardly flips a qubit",
        (Compare("workload.crosstalk_error", "tones.leakage_flip", FRACTION, gap=_FLIP_GAP),),
        asked=(_REACHED,),
        quiet=True,
    ),
)
