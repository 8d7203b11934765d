"""The reference and the instruments locked to it: what it may change, what it does, and the loose one."""

from __future__ import annotations

from dataclasses import dataclass

from planner.declare import (
    Ask,
    Bound,
    Chapter,
    Compare,
    Derived,
    Form,
    Input,
    Limit,
    Lock,
    Missing,
    Nature,
    Per,
    Typed,
    Unknown,
    Word,
    given,
    optional,
    word,
)
from planner.kinds import ANGLE, DRIFT, FRACTION, FREQUENCY
from planner.physics import clock, phasenoise, tones
from planner.switches import HAS_PHASE_NOISE, IS_LOOSE

LOOSE = {
    "none": "every instrument is locked to the one reference",
    "carrier": "the carrier (local oscillator) comes from an instrument on its own clock",
    "baseband": "the baseband tone comes from an instrument on its own clock",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Clock(Chapter):
    """Givens of the reference."""

    deviation_1s: Typed = given(
        FRACTION,
        "Allan deviation of the reference at 1 s",
        Nature.CHOICE,
        locks=Lock.OPEN,
        missing=Missing.DEFAULT,
        default="1e-11",
        above=0,
        below=1,
        example="2e-12",
        sensible="1e-13 to 1e-10",
    )
    deviation_100s: Typed = given(
        FRACTION,
        "Allan deviation of the reference at 100 s; unset: a tenth of that at 1 s",
        Nature.CHOICE,
        locks=Lock.OPEN,
        missing=Missing.FOUND,
        above=0,
        below=1,
        example="1e-12",
        sensible="1e-13 to 1e-10",
    )
    aging: Typed = given(
        DRIFT,
        "ageing of the reference",
        Nature.CHOICE,
        locks=Lock.OPEN,
        missing=Missing.DEFAULT,
        default="1e-10 /day",
        least=0,
        example="1e-11 /day",
        sensible="1e-12 to 1e-8 /day",
    )
    loose: Word = given(
        Form.CHOICE,
        "which tone comes from an instrument that is not locked to the reference",
        Nature.CHOICE,
        locks=Lock.OPEN,
        missing=Missing.DEFAULT,
        default="none",
        options=LOOSE,
        example="carrier",
    )
    loose_drift: Typed = given(
        FRACTION,
        "change of the loose instrument's clock between two calibrations",
        Nature.FACT,
        missing=Missing.DEFAULT,
        default="2e-7",
        least=0,
        below=1,
        example="2e-7",
        sensible="1e-8 to 1e-6",
    )


_PHASE_NOISE = {
    "offset": "phase_noise.offset",
    "level": "phase_noise.level",
    "carrier": "phase_noise.carrier",
    "frequency": "larmor.frequency",
}
_ONE_POINT = Unknown("phase noise is stated at one offset only: two or more make a spectrum")

DERIVEDS = (
    Derived(
        "clock.deviation_100s",
        clock.tenth,
        {"deviation_1s": "clock.deviation_1s"},
        per=Per.PLAN,
        help="Allan deviation at 100 s of a reference that is white FM up to there",
    ),
    Derived(
        "clock.white",
        clock.white_fm,
        {"deviation_1s": "clock.deviation_1s", "deviation_100s": "clock.deviation_100s"},
        per=Per.PLAN,
        shown=False,
    ),
    Derived(
        "clock.flicker",
        clock.flicker_fm,
        {"deviation_1s": "clock.deviation_1s", "deviation_100s": "clock.deviation_100s", "white": "clock.white"},
        per=Per.PLAN,
        shown=False,
    ),
    Derived(
        "clock.run",
        clock.run_time,
        {
            "sequence_time": optional("coherence.sequence_time"),
            "longest_wait": optional("workload.longest_wait"),
            "shot_time": "calibration.shot_time",
        },
        shown=False,
    ),
    Derived(
        "clock.averaging",
        clock.averaging_time,
        {"shots": "calibration.shots", "shot_time": "calibration.shot_time"},
        per=Per.PLAN,
        shown=False,
    ),
    Derived(
        "clock.required_accuracy",
        clock.required_accuracy,
        {
            "source_share": "workload.source_share",
            "allowed_noise": "coherence.allowed_noise",
            "frequency": "larmor.frequency",
        },
        help="a constant offset cancels; largest fractional change of the reference between calibration and run",
    ),
    Derived(
        "clock.change",
        clock.clock_change,
        {
            "white": "clock.white",
            "flicker": "clock.flicker",
            "aging": "clock.aging",
            "run": "clock.run",
            "gap": "calibration.interval",
            "averaging": "clock.averaging",
        },
        help="expected fractional change of the reference between calibration and run",
    ),
    Derived(
        "clock.required_stability",
        clock.required_stability,
        {
            "source_share": "workload.source_share",
            "frequency": "larmor.frequency",
            "sequence_time": "coherence.sequence_time",
            "allowed_sequence_error": "workload.allowed_sequence_error",
        },
        help="Allan deviation allowed at the length of the sequence",
    ),
    Derived(
        "clock.stability",
        clock.stability,
        {"white": "clock.white", "flicker": "clock.flicker", "sequence_time": "coherence.sequence_time"},
        bound=Bound(
            clock.below_allan_range,
            {"sequence_time": "coherence.sequence_time"},
            "below 0.1 s the Allan deviation of the clock is only an upper bound",
        ),
        help="Allan deviation expected at the length of the sequence; below 0.1 s only an upper bound",
    ),
    Derived(
        "clock.loose_tone",
        tones.loose_tone,
        {
            "frequency": "larmor.frequency",
            "oscillator": Input("source.lo", when=(IS_LOOSE,)),
            "carrier_is_loose": word("clock.loose", "carrier"),
        },
        shown=False,
        only=IS_LOOSE,
        off=Unknown("everything is locked"),
    ),
    Derived(
        "clock.required_mismatch",
        clock.required_accuracy,
        {
            "source_share": "workload.source_share",
            "allowed_noise": "coherence.allowed_noise",
            "frequency": "clock.loose_tone",
        },
        only=IS_LOOSE,
        off=Unknown("everything is locked"),
        unknown=Unknown("the loose tone is at 0 Hz: nothing of it can shift"),
        help="largest fractional change of the loose instrument between two calibrations",
    ),
    Derived(
        "clock.source_phase",
        phasenoise.source_phase,
        {**_PHASE_NOISE, "time": "workload.longest_wait"},
        only=HAS_PHASE_NOISE,
        off=Unknown("no phase noise is stated", "phase_noise.offset"),
        unknown=_ONE_POINT,
        heading="source ph",
        display="rad",
        help="rms phase of the source's phase noise over the longest wait",
    ),
    Derived(
        "clock.sequence_phase",
        phasenoise.source_phase,
        {**_PHASE_NOISE, "time": "coherence.sequence_time"},
        only=HAS_PHASE_NOISE,
        off=Unknown("no phase noise is stated"),
        unknown=_ONE_POINT,
        shown=False,
    ),
    Derived(
        "clock.allowed_phase",
        phasenoise.allowed_source_phase,
        {"source_share": "workload.source_share", "allowed_sequence_error": "workload.allowed_sequence_error"},
        per=Per.PLAN,
        shown=False,
    ),
)

LIMITS = (
    Limit(
        "clock",
        "the reference changes little enough between calibration and run, and is stable enough over the sequence",
        (
            Compare("clock.required_accuracy", "clock.change", FRACTION, what="change since calibration"),
            Compare("clock.required_stability", "clock.stability", FRACTION, what="Allan deviation over the sequence"),
            Compare(
                "clock.allowed_phase",
                "clock.sequence_phase",
                ANGLE,
                only_with=("clock.sequence_phase",),
                what="phase noise over the sequence",
            ),
        ),
    ),
    Limit(
        "loose-clock",
        "the instrument on its own clock stays within one source's share of the allowed noise",
        (Compare("noise.allowed_share", "noise.loose", FREQUENCY),),
        asked=(Ask(IS_LOOSE, "everything is locked"),),
    ),
)
