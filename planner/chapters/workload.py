"""The target circuit and what is asked of it."""

from __future__ import annotations

from dataclasses import dataclass

from planner.declare import (
    Chapter,
    Derived,
    Form,
    Input,
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
from planner.kinds import ANGLE, COUNT, ENERGY, FRACTION, TIME
from planner.physics import gates, thermal
from planner.switches import HAS_VALLEYS

ACCUMULATION = {
    "randomised": "gate errors add at random, as in a random circuit",
    "aligned": "gate errors add up in phase, as in one long wait",
}
READOUT = {
    "parity": "blockade of two spins: the window must exceed 5 k T of the electrons",
    "energy": "energy-selective tunnelling: h f must exceed k T of the electrons",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Workload(Chapter):
    """Givens of the workload."""

    gates: Typed = given(
        COUNT,
        "target gate count per qubit",
        Nature.DEMAND,
        missing=Missing.REQUIRED,
        least=1,
        most=1e12,
        example="500",
        sensible="1 to 1e4",
    )
    gate_time: Typed = given(
        TIME,
        "duration of one gate; unset: half a Rabi period",
        Nature.CHOICE,
        locks=Lock.OPEN,
        missing=Missing.FOUND,
        above=0,
        example="250 ns",
        sensible="10 ns to 1 us",
    )
    idle_per_gate: Typed = given(
        TIME,
        "idle time that follows each gate",
        Nature.CHOICE,
        locks=Lock.OPEN,
        missing=Missing.DEFAULT,
        default="0 ns",
        least=0,
        example="20 ns",
        sensible="0 to 1 us",
    )
    longest_wait: Typed = given(
        TIME,
        "longest wait of a qubit between gates",
        Nature.CHOICE,
        locks=Lock.OPEN,
        least=0,
        zero_unset=True,
        example="1.5 us",
        sensible="10 ns to 50 us",
    )
    refocusing_pulses: Typed = given(
        COUNT,
        "refocusing pulses spread over the longest wait: 0 none, 1 Hahn, n CPMG",
        Nature.CHOICE,
        locks=Lock.OPEN,
        missing=Missing.DEFAULT,
        default="0",
        least=0,
        most=1e6,
        example="1",
        sensible="0 to 100",
    )
    accumulation: Word = given(
        Form.CHOICE,
        "how the errors of many gates add; both are computed, this one is judged",
        Nature.DEMAND,
        missing=Missing.DEFAULT,
        default="randomised",
        options=ACCUMULATION,
        example="aligned",
    )
    allowed_phase: Typed = given(
        ANGLE,
        "allowed rms phase over the longest wait",
        Nature.DEMAND,
        missing=Missing.DEFAULT,
        default="0.25 rad",
        above=0,
        example="0.25 rad",
        sensible="0.05 to 1 rad",
    )
    allowed_gate_error: Typed = given(
        FRACTION,
        "allowed average infidelity of one gate",
        Nature.DEMAND,
        missing=Missing.DEFAULT,
        default="1e-3",
        above=0,
        below=0.5,
        example="1e-3",
        sensible="1e-4 to 1e-2",
    )
    allowed_sequence_error: Typed = given(
        FRACTION,
        "allowed error of the whole circuit",
        Nature.DEMAND,
        missing=Missing.DEFAULT,
        default="0.1",
        above=0,
        below=1 / 3,
        example="0.1",
        sensible="0.01 to 0.3",
    )
    source_share: Typed = given(
        FRACTION,
        "amplitude share of the allowed noise that any one technical source may take",
        Nature.DEMAND,
        missing=Missing.DEFAULT,
        default="0.3",
        above=0,
        most=1,
        example="0.3",
        sensible="0.1 to 0.5",
    )
    readout: Word = given(
        Form.CHOICE,
        "how the spins are read",
        Nature.CHOICE,
        locks=Lock.CLOSING,
        missing=Missing.DEFAULT,
        default="parity",
        options=READOUT,
        example="energy",
    )
    readout_time: Typed = given(
        TIME,
        "length of one readout; unset: relaxation during readout is not counted",
        Nature.CHOICE,
        locks=Lock.OPEN,
        missing=Missing.OFF,
        above=0,
        example="10 us",
        sensible="1 us to 1 ms",
    )
    allowed_readout_error: Typed = given(
        FRACTION,
        "allowed error of one readout",
        Nature.DEMAND,
        missing=Missing.DEFAULT,
        default="0.01",
        above=0,
        below=0.5,
        example="0.01",
        sensible="1e-3 to 0.1",
    )
    blockade_window: Typed = given(
        ENERGY,
        "energy window of the blockade; unset: smallest valley splitting in use",
        Nature.FACT,
        missing=Missing.FOUND,
        above=0,
        example="250 ueV",
        sensible="50 to 500 ueV",
    )
    valley_window: Typed = given(
        ENERGY,
        "distance that Zeeman energy and valley splitting keep",
        Nature.DEMAND,
        missing=Missing.DEFAULT,
        default="8 ueV",
        above=0,
        example="8 ueV",
        sensible="3 to 20 ueV",
    )
    crosstalk_error: Typed = given(
        FRACTION,
        "allowed flip of a qubit by another one's drive",
        Nature.DEMAND,
        missing=Missing.DEFAULT,
        default="1e-3",
        above=0,
        below=0.5,
        example="1e-3",
        sensible="1e-4 to 1e-2",
    )
    exchange_gates: Typed = given(
        COUNT,
        "exchange gates per sequence",
        Nature.DEMAND,
        missing=Missing.DEFAULT,
        default="0",
        least=0,
        most=1e12,
        example="20",
    )
    allowed_pair_error: Typed = given(
        FRACTION,
        "allowed error of one exchange gate",
        Nature.DEMAND,
        missing=Missing.DEFAULT,
        default="1e-2",
        above=0,
        below=0.5,
        example="1e-2",
        sensible="1e-3 to 0.1",
    )


DERIVEDS = (
    Derived("workload.pi_pulse", gates.pi_pulse, {"rabi_frequency": "qubit.rabi_frequency"}, shown=False),
    Derived(
        "workload.gate_time",
        gates.pi_pulse,
        {"rabi_frequency": "qubit.rabi_frequency"},
        help="duration of one gate: half a Rabi period",
    ),
    Derived(
        "workload.blockade_window",
        thermal.smallest_in_use,
        {"valley_splitting": "qubit.valley_splitting", "in_use": word("qubit.role", "use")},
        per=Per.PLAN,
        only=HAS_VALLEYS,
        off=Unknown("the host has no valleys: type workload.blockade_window", "workload.blockade_window"),
        help="energy window of the blockade: smallest valley splitting of the qubits in use",
    ),
    Derived(
        "workload.noise_time",
        gates.noise_time,
        {
            "wait": optional("workload.longest_wait"),
            "gate_time": Input("workload.gate_time", unless="workload.longest_wait"),
        },
        shown=False,
    ),
)
LIMITS = ()
