"""The magnet's coils: field, current, drift and noise of each, and the frequency step that they make."""

from __future__ import annotations

from planner.declare import Ask, Compare, Derived, Input, Limit, Per, Unknown, optional, word
from planner.kinds import FREQUENCY
from planner.physics import coils
from planner.switches import HAS_COILS, HAS_STEP

_MODE = {
    "is_persistent": word("coil.mode", "persistent"),
    "is_unset": word("coil.mode", ""),
    "magnet_is_persistent": word("magnet.mode", "persistent"),
}
_OFF = word("coil.mode", "off")

DERIVEDS = (
    Derived(
        "coil.unit", coils.unit_direction, {"direction": "coil.direction"}, per=Per.COIL, shown=False, trailing=(3,)
    ),
    Derived(
        "coil.field",
        coils.coil_fields,
        {"set_vector": "larmor.set_vector", "direction": "coil.unit", "is_off": _OFF},
        per=Per.COIL,
        heading="field",
        display="mT",
        unknown=Unknown("the coils that are on can't make the set field: they miss it by more than 0.1 %"),
        help="field of this coil that makes the set field together with the others",
    ),
    Derived(
        "coil.current",
        coils.coil_current,
        {"field": "coil.field", "field_per_current": "coil.field_per_current"},
        per=Per.COIL,
        heading="current",
        display="A",
        help="current of this coil, with its sign",
    ),
    Derived("coil.size", coils.field_magnitude, {"field": "coil.field"}, per=Per.COIL, shown=False),
    Derived(
        "coil.drift",
        coils.coil_drift,
        {"driven": "magnet.drift_driven", "persistent": "magnet.drift_persistent", **_MODE},
        per=Per.COIL,
        shown=False,
    ),
    Derived(
        "coil.noise",
        coils.coil_noise,
        {"driven": "magnet.noise_driven", "persistent": "magnet.noise_persistent", **_MODE, "direction": "coil.unit"},
        per=Per.COIL,
        shown=False,
    ),
    Derived(
        "coil.settle", coils.settle_of_coil, {"slope": "magnet.settle_slope", "is_off": _OFF}, per=Per.COIL, shown=False
    ),
    Derived(
        "coil.half_step",
        coils.half_step,
        {
            "field_response": "larmor.response",
            "direction": Input("coil.unit", optional=True),
            "is_off": _OFF,
            "step": optional("coil.step"),
            "field_per_current": optional("coil.field_per_current"),
        },
        shown=False,
        only=HAS_COILS,
        off=Unknown("no coil is stated"),
        unknown=Unknown("no running coil states its step, field per current and direction"),
    ),
)

LIMITS = (
    Limit(
        "field-step",
        "the smallest step of the currents moves no line by more than a Rabi frequency",
        (
            Compare(
                "qubit.rabi_frequency",
                "coil.half_step",
                FREQUENCY,
                gap="half a step {expected} {unit} of {allowed} Rabi",
            ),
        ),
        asked=(Ask(HAS_STEP, "no coil states a step"),),
    ),
)
