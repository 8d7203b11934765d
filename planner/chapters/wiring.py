"""Lines and stages: power, photons and heat; parts near the chip in the set field."""

from __future__ import annotations

from planner.declare import Ask, Compare, Derived, Limit, Per, Unknown, optional, tolerance, word
from planner.kinds import FIELD, NUMBER, POWER
from planner.physics import wiring
from planner.switches import HAS_DRIVE, HAS_PARTS, HAS_STAGES

_EITHER = Unknown("this part may be either")

DERIVEDS = (
    Derived(
        "line.frequency",
        wiring.lowest_in_use,
        {"frequency": "larmor.frequency", "in_use": word("qubit.role", "use")},
        per=Per.PLAN,
        shown=False,
    ),
    Derived(
        "line.source_power",
        wiring.source_power,
        {"device_power": "line.device_power", "attenuation": "line.attenuation", "cable_loss": "line.cable_loss"},
        per=Per.LINE,
        heading="needs",
        display="dBm",
        help="power that the source must deliver for the device's",
    ),
    Derived(
        "line.amplitude",
        wiring.drive_amplitude,
        {"available": "source.power", "needed": "line.source_power"},
        per=Per.LINE,
        shown=False,
    ),
    Derived("line.wanted", wiring.unity, {"needed": "line.source_power"}, per=Per.LINE, shown=False),
    Derived(
        "line.photons",
        wiring.thermal_photons,
        {
            "frequency": "line.frequency",
            "source_temperature": "line.source_temperature",
            "attenuation": "line.attenuation",
            "temperature": "stage.temperature",
        },
        per=Per.LINE,
        heading="photons",
        help="thermal photons at the device end, at the lowest frequency in use",
    ),
    Derived(
        "line.effective_temperature",
        wiring.effective_temperature,
        {"photons": "line.photons", "frequency": "line.frequency"},
        per=Per.LINE,
        heading="T eff",
        display="mK",
        help="temperature of a black body with as many photons",
    ),
    Derived(
        "stage.heat",
        wiring.stage_heat,
        {
            "device_power": optional("line.device_power"),
            "duty": "line.duty",
            "count": "line.count",
            "attenuation": optional("line.attenuation"),
            "cooling_power": optional("stage.cooling_power"),
        },
        per=Per.STAGE,
        heading="heat",
        display="uW",
        help="heat of all drives at this stage",
        unknown=Unknown("a line that states a device power does not state its attenuation", "line.attenuation"),
    ),
    Derived(
        "stage.left",
        wiring.power_left,
        {"cooling_power": "stage.cooling_power", "base_load": "stage.base_load"},
        per=Per.STAGE,
        shown=False,
    ),
    Derived(
        "part.critical",
        wiring.film_critical_field,
        {
            "field": "magnet.field",
            "elevation": "magnet.elevation",
            "uncertainty": tolerance("magnet.elevation"),
            "in_plane": "part.critical_in_plane",
            "normal": "part.critical_normal",
            "be_normal": word("part.must", "be normal"),
        },
        per=Per.PART,
        heading="critical",
        display="mT",
        help="critical field in the direction of the set field, at the worst end of its tolerance",
    ),
    Derived(
        "part.allowed",
        wiring.part_allowed,
        {"field": "magnet.field", "critical": "part.critical", "be_normal": word("part.must", "be normal")},
        per=Per.PART,
        shown=False,
    ),
    Derived(
        "part.expected",
        wiring.part_expected,
        {"field": "magnet.field", "critical": "part.critical", "be_normal": word("part.must", "be normal")},
        per=Per.PART,
        shown=False,
    ),
    Derived(
        "part.judged",
        wiring.part_is_judged,
        {"superconduct": word("part.must", "superconduct"), "be_normal": word("part.must", "be normal")},
        per=Per.PART,
        shown=False,
        unknown=_EITHER,
    ),
)

LIMITS = (
    Limit(
        "drive-power",
        "the source delivers the power that each driven line wants at the device",
        (
            Compare(
                "line.amplitude",
                "line.wanted",
                NUMBER,
                only_with=("line.device_power",),
                gap="{allowed} times the amplitude wanted",
            ),
        ),
        per=Per.LINE,
        asked=(Ask(HAS_DRIVE, "no line states a device power"),),
    ),
    Limit(
        "heat",
        "each stage carries the heat of the drives beside its base load",
        (Compare("stage.left", "stage.heat", POWER, gap="{expected} of {allowed} {unit} left"),),
        per=Per.STAGE,
        asked=(Ask(HAS_STAGES, "no stages"),),
    ),
    Limit(
        "parts",
        "parts near the chip stay superconducting, or normal, as they must",
        (
            Compare(
                "part.allowed",
                "part.expected",
                FIELD,
                only_with=("part.judged",),
                gap="{expected} against {allowed} {unit}",
            ),
        ),
        per=Per.PART,
        asked=(Ask(HAS_PARTS, "no part must stay superconducting or normal"),),
    ),
)
