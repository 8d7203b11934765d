"""How much coherence is left: decay times, phase over the longest wait, error per gate and gates within reach."""

from __future__ import annotations

from planner.declare import Compare, Derived, Input, Limit, Unknown, optional, word
from planner.kinds import ANGLE, FRACTION, NUMBER
from planner.physics import dephasing, exchange, gates, noise
from planner.switches import ALIGNED, FREE, RANDOMISED, REFOCUSED

_MEASURED = "qubit.t2_star"
_UNLIMITED = Unknown("no noise in the model limits it")

DERIVEDS = (
    Derived(
        "coherence.t2_star",
        dephasing.t2_star,
        {
            "nuclear": Input("noise.nuclear", unless=_MEASURED),
            "barrier": Input("noise.barrier", unless=_MEASURED),
            "magnet": Input("noise.magnet", unless=_MEASURED),
            "amplitude": Input("noise.charge_amplitude", unless=_MEASURED),
            "density": "noise.white_density",
            "lowest": "calibration.lowest",
            "measured": optional(_MEASURED),
        },
        heading="T2*",
        display="us",
        unknown=_UNLIMITED,
        help="1/e time of free coherence, measured or from nuclei, barrier, magnet, charge and white noise",
    ),
    Derived(
        "coherence.refocused_flicker",
        noise.refocused_amplitude,
        {
            "amplitude": "noise.charge_amplitude",
            "typed": optional("qubit.frequency_noise"),
            "own_relative": optional("qubit.relative_noise"),
            "material_relative": optional("model.relative_noise"),
            "gradient": optional("qubit.gradient"),
            "white": optional("qubit.white_noise"),
        },
        shown=False,
        unknown=Unknown(
            "what refocusing leaves needs frequency_noise, relative_noise, gradient or white_noise",
            "qubit.frequency_noise",
        ),
    ),
    Derived(
        "coherence.t2_echo",
        dephasing.t2_echo,
        {"amplitude": "coherence.refocused_flicker", "density": "noise.white_density"},
        heading="T2 echo",
        display="us",
        unknown=_UNLIMITED,
        help="1/e time after one refocusing pulse, of charge and white noise",
    ),
    Derived(
        "coherence.wait_phase",
        dephasing.wait_phase,
        {
            "total": Input("noise.total", when=(FREE,)),
            "amplitude": Input("coherence.refocused_flicker", when=(REFOCUSED,)),
            "density": "noise.white_density",
            "wait": "workload.longest_wait",
            "pulses": "workload.refocusing_pulses",
        },
        heading="phase",
        display="rad",
        help="rms phase over the longest wait",
    ),
    Derived(
        "coherence.pulse_detuning",
        gates.pulse_detuning,
        {
            "static": "noise.static",
            "amplitude": "noise.free_flicker",
            "lowest": "calibration.lowest",
            "duration": "workload.pi_pulse",
        },
        shown=False,
    ),
    Derived(
        "coherence.gate_error",
        gates.gate_error,
        {
            "detuning": "coherence.pulse_detuning",
            "rabi_frequency": "qubit.rabi_frequency",
            "density": "noise.free_white",
            "duration": "workload.pi_pulse",
        },
        heading="pulse err",
        help="average infidelity of a pi pulse by detuning noise",
    ),
    Derived(
        "coherence.error_per_gate",
        gates.error_per_gate,
        {
            "gate_error": "coherence.gate_error",
            "static": "noise.static",
            "amplitude": "noise.free_flicker",
            "density": "noise.free_white",
            "lowest": "calibration.lowest",
            "gate_time": "workload.gate_time",
            "idle": "workload.idle_per_gate",
            "t1": optional("qubit.t1"),
        },
        heading="gate err",
        help="error of one gate with its idle time, relaxation included where T1 is given",
    ),
    Derived(
        "coherence.sequence_time",
        gates.sequence_time,
        {"gates": "workload.gates", "gate_time": "workload.gate_time", "idle": "workload.idle_per_gate"},
        heading="sequence",
        display="us",
        help="length of the target circuit",
    ),
    Derived(
        "coherence.gates_randomised",
        gates.gates_randomised,
        {"error": "coherence.error_per_gate", "allowed": "pair.error_left"},
        heading="random.",
        unknown=_UNLIMITED,
        help="gates within the allowed sequence error when errors add at random",
    ),
    Derived(
        "coherence.gates_aligned",
        gates.gates_aligned,
        {
            "static": Input("noise.static", when=(FREE,)),
            "free_amplitude": Input("noise.free_flicker", when=(FREE,)),
            "free_density": Input("noise.free_white", when=(FREE,)),
            "amplitude": Input("coherence.refocused_flicker", when=(REFOCUSED,)),
            "density": "noise.white_density",
            "lowest": "calibration.lowest",
            "pulses": "workload.refocusing_pulses",
            "allowed": "pair.error_left",
            "gate_time": "workload.gate_time",
            "idle": "workload.idle_per_gate",
        },
        heading="aligned",
        unknown=_UNLIMITED,
        help="gates within the allowed sequence error when errors add up in phase",
    ),
    Derived(
        "coherence.single_error",
        gates.sequence_error,
        {
            "error": Input("coherence.error_per_gate", when=(RANDOMISED,)),
            "gates": "workload.gates",
            "aligned": word("workload.accumulation", "aligned"),
            "static": Input("noise.static", when=(ALIGNED, FREE)),
            "free_amplitude": Input("noise.free_flicker", when=(ALIGNED, FREE)),
            "free_density": Input("noise.free_white", when=(ALIGNED, FREE)),
            "amplitude": Input("coherence.refocused_flicker", when=(ALIGNED, REFOCUSED)),
            "density": "noise.white_density",
            "lowest": "calibration.lowest",
            "pulses": "workload.refocusing_pulses",
            "sequence_time": "coherence.sequence_time",
        },
        shown=False,
    ),
    Derived(
        "coherence.sequence_error",
        exchange.composed_error,
        {"single": "coherence.single_error", "exchange": "pair.share"},
        heading="seq. err",
        help="error of the whole circuit, exchange gates included",
    ),
    Derived(
        "coherence.reachable_gates",
        gates.reachable_gates,
        {
            "randomised": Input("coherence.gates_randomised", when=(RANDOMISED,)),
            "aligned_gates": Input("coherence.gates_aligned", when=(ALIGNED,)),
            "aligned": word("workload.accumulation", "aligned"),
        },
        heading="gates",
        help="gates within the allowed sequence error, by the accumulation that is judged",
    ),
    Derived(
        "coherence.allowed_noise",
        gates.allowed_noise,
        {
            "rabi_frequency": "qubit.rabi_frequency",
            "idle": "workload.idle_per_gate",
            "wait": Input("workload.longest_wait", when=(FREE,)),
            "pulses": "workload.refocusing_pulses",
            "gates": "workload.gates",
            "allowed_phase": "workload.allowed_phase",
            "allowed_gate_error": "workload.allowed_gate_error",
            "allowed_sequence_error": "workload.allowed_sequence_error",
        },
        heading="stands",
        display="kHz",
        help="slow detuning that this qubit stands: the smallest that phase, gate and sequence allow",
    ),
)

LIMITS = (
    Limit(
        "wait",
        "the phase over the longest wait stays within what is allowed",
        (Compare("workload.allowed_phase", "coherence.wait_phase", ANGLE),),
    ),
    Limit(
        "gate",
        "the error of one gate stays within what is allowed",
        (Compare("workload.allowed_gate_error", "coherence.error_per_gate", FRACTION),),
    ),
    Limit(
        "sequence",
        "the gates within reach cover the target circuit",
        (
            Compare(
                "coherence.reachable_gates", "workload.gates", NUMBER, gap="{allowed} gates within reach of {expected}"
            ),
        ),
    ),
)
