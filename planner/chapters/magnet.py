"""The magnet: set field and direction, mode, drift, noise and remanence; its rating and its share of the allowance."""

from __future__ import annotations

from dataclasses import dataclass
from math import pi

import numpy as np

from planner.declare import (
    Chapter,
    Compare,
    Derived,
    Form,
    Limit,
    Lock,
    Missing,
    Nature,
    Per,
    Typed,
    Unknown,
    Word,
    given,
    law,
    optional,
    word,
)
from planner.kinds import ANGLE, DRIFT, FIELD, FREQUENCY, NUMBER, TIME
from planner.physics import Array
from planner.physics.noise import field_noise_seen

MODES = {
    "driven": "the supply stays on: more noise and drift, the field can be changed at once",
    "persistent": "the current circulates without the supply: quiet, slow drift",
}
# No magnet of a dilution refrigerator reaches this field; a larger number is a slip of the unit.
STRONGEST = 50.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Magnet(Chapter):
    """Givens of the magnet."""

    field: Typed = given(
        FIELD,
        "size set at the supply, local fields excluded",
        Nature.CHOICE,
        locks=Lock.OPEN,
        missing=Missing.REQUIRED,
        above=0,
        most=STRONGEST,
        example="650 mT",
        sensible="0.1 to 3 T",
    )
    elevation: Typed = given(
        ANGLE,
        "direction out of the chip plane towards its normal c3; the tolerance is how well the mount is known",
        Nature.CHOICE,
        locks=Lock.OPEN,
        missing=Missing.DEFAULT,
        default="0 deg",
        least=-pi / 2,
        most=pi / 2,
        example="0 ± 0.5 deg",
        sensible="-90 to 90 deg",
    )
    azimuth: Typed = given(
        ANGLE,
        "direction in the chip plane from c1 towards c2",
        Nature.CHOICE,
        locks=Lock.OPEN,
        missing=Missing.DEFAULT,
        default="0 deg",
        least=-2 * pi,
        most=2 * pi,
        example="51 deg",
        sensible="-180 to 180 deg",
    )
    mode: Word = given(
        Form.CHOICE,
        "how the current flows; picks drift and noise",
        Nature.CHOICE,
        locks=Lock.RAMP,
        missing=Missing.DEFAULT,
        default="driven",
        options=MODES,
        example="persistent",
    )
    drift_driven: Typed = given(
        DRIFT,
        "drift in driven mode, long after a ramp",
        Nature.FACT,
        missing=Missing.DEFAULT,
        default="5 ppm/h",
        least=0,
        example="4 ppm/h",
        sensible="0.5 to 20 ppm/h",
    )
    drift_persistent: Typed = given(
        DRIFT,
        "drift in persistent mode, long after a ramp",
        Nature.FACT,
        missing=Missing.DEFAULT,
        default="0.05 ppm/h",
        least=0,
        example="0.03 ppm/h",
        sensible="0.001 to 0.5 ppm/h",
    )
    noise_driven: Typed = given(
        FIELD,
        "slow rms field noise in driven mode, per component c1, c2, c3",
        Nature.FACT,
        missing=Missing.DEFAULT,
        default="1 uT",
        sizes=(1, 3),
        least=0,
        example="1500, 400, 400 nT",
        sensible="0.1 to 3 uT",
    )
    noise_persistent: Typed = given(
        FIELD,
        "slow rms field noise in persistent mode, per component c1, c2, c3",
        Nature.FACT,
        missing=Missing.DEFAULT,
        default="5 nT",
        sizes=(1, 3),
        least=0,
        example="5 nT",
        sensible="1 to 50 nT",
    )
    settle_slope: Typed = given(
        DRIFT,
        "slope one hour after a ramp, falling as 1/t",
        Nature.FACT,
        missing=Missing.DEFAULT,
        default="12 ppm/h",
        least=0,
        example="12 ppm/h",
        sensible="3 to 50 ppm/h",
    )
    since_ramp: Typed = given(
        TIME,
        "time since the last ramp when the run begins; unset: long after",
        Nature.CHOICE,
        locks=Lock.OPEN,
        missing=Missing.OFF,
        above=0,
        example="24 h",
        sensible="1 to 100 h",
    )
    rating: Typed = given(
        FIELD,
        "largest field of the magnet in the direction used",
        Nature.CHOICE,
        locks=Lock.CLOSING,
        above=0,
        most=STRONGEST,
        example="1 T",
        sensible="1 to 9 T",
    )
    remanence: Typed = given(
        FIELD,
        "standard uncertainty of each component of the field at a given current",
        Nature.FACT,
        missing=Missing.DEFAULT,
        default="2 mT",
        sizes=(1, 3),
        least=0,
        example="2.0, 0.5, 0.5 mT",
        sensible="0.1 to 10 mT",
    )


@law(DRIFT, driven=DRIFT, persistent=DRIFT, is_persistent=NUMBER)
def drift_of_mode(*, driven: Array, persistent: Array, is_persistent: Array) -> Array:
    """Drift of the mode the magnet is in."""
    return np.where(is_persistent > 0, persistent, driven)


@law(FIELD, driven=FIELD, persistent=FIELD, is_persistent=NUMBER)
def noise_of_mode(*, driven: Array, persistent: Array, is_persistent: Array) -> Array:
    """Field noise per component of the mode the magnet is in."""
    return np.where(is_persistent[..., None] > 0, persistent, driven)


DERIVEDS = (
    Derived(
        "magnet.drift",
        drift_of_mode,
        {
            "driven": "magnet.drift_driven",
            "persistent": "magnet.drift_persistent",
            "is_persistent": word("magnet.mode", "persistent"),
        },
        per=Per.PLAN,
        shown=False,
    ),
    Derived(
        "magnet.noise",
        noise_of_mode,
        {
            "driven": "magnet.noise_driven",
            "persistent": "magnet.noise_persistent",
            "is_persistent": word("magnet.mode", "persistent"),
        },
        per=Per.PLAN,
        shown=False,
        trailing=(3,),
    ),
    Derived(
        "magnet.noise_seen",
        field_noise_seen,
        {"field_noise": "noise.magnet", "measured_t2_star": optional("qubit.t2_star")},
        shown=False,
    ),
)

_RATED = "{expected} of {allowed} {unit} rated"

LIMITS = (
    Limit(
        "rating",
        "the set field stays within the magnet's rating in the direction used, and each coil within its own",
        (
            Compare("magnet.rating", "magnet.field", FIELD, only_with=("magnet.rating",), gap=_RATED),
            Compare("coil.rating", "coil.size", FIELD, only_with=("coil.rating",), what="coil", gap=_RATED),
        ),
        per=Per.PLAN,
        none_made=Unknown("is not typed", "magnet.rating"),
        tight_counts=False,
    ),
    Limit(
        "drift",
        "what the magnet drifts between two calibrations stays within one source's share of the allowed noise",
        (Compare("noise.allowed_share", "noise.drift", FREQUENCY),),
    ),
    Limit(
        "field-noise",
        "the magnet's field noise stays within one source's share of the allowed noise",
        (Compare("noise.allowed_share", "magnet.noise_seen", FREQUENCY),),
    ),
)
