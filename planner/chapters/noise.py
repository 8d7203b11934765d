"""Every source of slow frequency noise, their sum, and what a measured T2* leaves unexplained.

A new noise source is one law, one line here and one argument of `static_noise`.
"""

from __future__ import annotations

from collections.abc import Mapping

from planner.declare import Bound, Derived, Input, Unknown, optional, word
from planner.physics import coils, dephasing, noise, nuclei
from planner.switches import IS_LOOSE

_MEASURED = "qubit.t2_star"
_DRIFTED: Mapping[str, str | Input] = {
    "field_response": "larmor.response",
    "field_slope": "larmor.field_slope",
    "field": "magnet.field",
    "interval": "calibration.interval",
    "direction": optional("coil.unit"),
    "coil_field": optional("coil.field"),
}
_NO_T2_STAR = Unknown("no measured T2* is typed", _MEASURED)

DERIVEDS = (
    Derived(
        "noise.bath",
        nuclei.bath_noise,
        {"moment": "host.moment", "spinful_fraction": "model.spinful_fraction", "nuclei": "model.nuclei"},
        shown=False,
    ),
    Derived(
        "noise.nuclear",
        nuclei.nuclear_noise,
        {
            "model": "noise.bath",
            "typed": optional("qubit.nuclear_noise"),
            "tracked": optional("qubit.tracked_noise"),
            "axis_share": optional("larmor.axis"),
            "is_hole": "host.hole",
        },
        heading="nuclei",
        display="kHz",
        bound=Bound(
            nuclei.few_nuclei,
            {
                "nuclei": "model.nuclei",
                "spinful_fraction": "model.spinful_fraction",
                "typed": "qubit.nuclear_noise",
                "tracked": "qubit.tracked_noise",
                "t2_star": _MEASURED,
            },
            "few nuclei: the bath formula is only an upper bound, type nuclear_noise or t2_star first",
            least=1 / 30,
        ),
        help="slow rms of the well's nuclear spins",
    ),
    Derived(
        "noise.barrier_bath",
        nuclei.barrier_bath_noise,
        {
            "moment": "host.barrier_moment",
            "germanium": "model.barrier_germanium",
            "spinful": "model.barrier_spinful",
            "share": "model.barrier_share",
            "nuclei": "model.barrier_nuclei",
        },
        shown=False,
    ),
    Derived(
        "noise.barrier",
        nuclei.barrier_noise,
        {"model": "noise.barrier_bath", "typed": optional("qubit.nuclear_noise")},
        heading="barrier",
        display="kHz",
        help="slow rms of the barrier's 73Ge",
    ),
    Derived(
        "noise.magnet",
        coils.magnet_noise,
        {
            "field_response": "larmor.response",
            "noise": "magnet.noise",
            "direction": optional("coil.unit"),
            "is_off": word("coil.mode", "off"),
            "coil_noise": optional("coil.noise"),
        },
        heading="magnet",
        display="kHz",
        help="slow rms from the magnet's field noise, of its running coils where they are stated",
    ),
    Derived(
        "noise.drift_own",
        coils.drifted,
        {**_DRIFTED, "rate": "magnet.drift", "coil_rate": optional("coil.drift")},
        shown=False,
    ),
    Derived(
        "noise.drift_settling",
        coils.drifted,
        {**_DRIFTED, "rate": "magnet.settle_slope", "coil_rate": optional("coil.settle")},
        shown=False,
    ),
    Derived(
        "noise.drift",
        coils.drift_after_ramp,
        {"own": "noise.drift_own", "settling": "noise.drift_settling", "since_ramp": optional("magnet.since_ramp")},
        heading="drift",
        display="kHz",
        help="frequency change by the magnet's drift over one calibration interval",
    ),
    Derived(
        "magnet.settling",
        coils.settling_time,
        {"own": "noise.drift_own", "settling": "noise.drift_settling", "allowed": "noise.allowed_share"},
        heading="settle",
        display="h",
        unknown=Unknown("the drift of the mode alone is too much: no wait helps", "magnet.mode"),
        help="time after a ramp at which the drift is within its share; 0 where it is one hour after",
    ),
    Derived(
        "noise.calibration",
        noise.calibration_noise,
        {
            "contrast": "calibration.contrast",
            "wait": "calibration.wait",
            "t2_star": "coherence.t2_star",
            "shots": "calibration.shots",
        },
        heading="calibr.",
        display="kHz",
        unknown=Unknown(
            "after calibration.wait the contrast is below 0.01: the wait is too long for T2*", "calibration.wait"
        ),
        help="precision of the frequency calibration",
    ),
    Derived(
        "noise.clock",
        noise.scaled_tone,
        {"frequency": "larmor.frequency", "change": "clock.change"},
        heading="clock",
        display="kHz",
        help="shift by the change of the reference since calibration",
    ),
    Derived(
        "noise.loose",
        noise.loose_noise,
        {"tone": Input("clock.loose_tone", when=(IS_LOOSE,)), "drift": "clock.loose_drift"},
        heading="loose",
        display="kHz",
        help="shift by the instrument that is not locked",
    ),
    Derived(
        "noise.charge_amplitude",
        noise.charge_amplitude,
        {
            "typed": optional("qubit.frequency_noise"),
            "own_relative": optional("qubit.relative_noise"),
            "frequency": "larmor.frequency",
            "gradient": optional("qubit.gradient"),
            "g": "larmor.g",
            "displacement": optional("model.displacement"),
            "charge_noise": optional("model.charge_noise"),
            "material_relative": optional("model.relative_noise"),
            "is_hole": "host.hole",
            "local_field": "qubit.local_field",
        },
        heading="A 1 Hz",
        display="kHz/rtHz",
        unknown=Unknown(
            "it has a local field but no charge noise: type frequency_noise, relative_noise or gradient",
            "qubit.frequency_noise",
        ),
        help="1/f amplitude of the qubit's frequency at 1 Hz",
    ),
    Derived(
        "noise.charge",
        dephasing.flicker_rms,
        {"amplitude": "noise.charge_amplitude", "lowest": "calibration.lowest", "time": "workload.noise_time"},
        heading="charge",
        display="kHz",
        help="equivalent rms of charge noise over the longest wait (else one gate)",
    ),
    Derived("noise.white_density", noise.or_zero, {"density": optional("qubit.white_noise")}, shown=False),
    Derived(
        "noise.white",
        dephasing.white_rms,
        {"density": "noise.white_density", "time": "workload.noise_time"},
        heading="white",
        display="kHz",
        help="equivalent rms of white noise over the longest wait (else one gate)",
    ),
    Derived(
        "noise.static",
        dephasing.static_noise,
        {
            "nuclear": Input("noise.nuclear", unless=_MEASURED),
            "barrier": Input("noise.barrier", unless=_MEASURED),
            "magnet": Input("noise.magnet", unless=_MEASURED),
            "measured_t2_star": optional(_MEASURED),
            "drift": "noise.drift",
            "calibration": "noise.calibration",
            "clock": "noise.clock",
            "loose": "noise.loose",
        },
        shown=False,
    ),
    Derived(
        "noise.free_flicker",
        dephasing.free_flicker,
        {"amplitude": Input("noise.charge_amplitude", unless=_MEASURED), "measured_t2_star": optional(_MEASURED)},
        shown=False,
    ),
    Derived(
        "noise.free_white",
        dephasing.free_white,
        {"density": "noise.white_density", "measured_t2_star": optional(_MEASURED)},
        shown=False,
    ),
    Derived(
        "noise.total",
        dephasing.total_noise,
        {
            "static": "noise.static",
            "amplitude": "noise.free_flicker",
            "density": "noise.free_white",
            "lowest": "calibration.lowest",
            "time": "workload.noise_time",
        },
        heading="noise",
        display="kHz",
        help="root-sum-square of all noise; a measured T2* stands for what it contains",
    ),
    Derived(
        "noise.unexplained",
        dephasing.unexplained_noise,
        {
            "measured": "qubit.t2_star",
            "nuclear": "noise.nuclear",
            "barrier": "noise.barrier",
            "magnet": "noise.magnet",
            "amplitude": "noise.charge_amplitude",
            "density": "noise.white_density",
            "lowest": "calibration.lowest",
        },
        heading="unexpl.",
        display="kHz",
        unknown=_NO_T2_STAR,
        help="what the model leaves unexplained of a measured T2*",
    ),
    Derived(
        "noise.allowed_share",
        noise.allowed_share,
        {"source_share": "workload.source_share", "allowed_noise": "coherence.allowed_noise"},
        shown=False,
    ),
)
LIMITS = ()
