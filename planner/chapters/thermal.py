"""Temperature of the electrons against Zeeman energy and blockade window: whether the spins can be read."""

from __future__ import annotations

from planner.declare import Compare, Derived, Limit, Per
from planner.kinds import ENERGY, FRACTION
from planner.physics import thermal
from planner.switches import ENERGY_SELECTIVE, PARITY

DERIVEDS = (
    Derived(
        "thermal.ratio",
        thermal.thermal_ratio,
        {"frequency": "larmor.frequency", "temperature": "chip.electron_temperature"},
        heading="hf/kT",
        help="Zeeman energy over k T of the electrons",
    ),
    Derived(
        "thermal.excited",
        thermal.excited_share,
        {"ratio": "thermal.ratio"},
        heading="excited",
        help="share of the upper level in equilibrium",
    ),
    Derived(
        "thermal.readout_error",
        thermal.tunnelling_error,
        {"ratio": "thermal.ratio"},
        heading="read err",
        help="thermal error of energy-selective readout",
    ),
    Derived(
        "thermal.blockade_need",
        thermal.blockade_need,
        {"temperature": "chip.electron_temperature"},
        per=Per.PLAN,
        shown=False,
    ),
    Derived(
        "thermal.relaxation",
        thermal.relaxation_during_readout,
        {"readout_time": "workload.readout_time", "t1": "qubit.t1"},
        shown=False,
    ),
)

LIMITS = (
    Limit(
        "readout",
        "the spins can be told apart at the electron temperature, and do not relax first",
        (
            Compare(
                "workload.blockade_window",
                "thermal.blockade_need",
                ENERGY,
                when=PARITY,
                what="blockade window against 5 k T",
                gap="window {allowed} {unit}, {expected} needed",
            ),
            Compare(
                "workload.allowed_readout_error",
                "thermal.readout_error",
                FRACTION,
                when=ENERGY_SELECTIVE,
                what="thermal error",
            ),
            Compare(
                "workload.allowed_readout_error",
                "thermal.relaxation",
                FRACTION,
                only_with=("workload.readout_time", "qubit.t1"),
                what="relaxation during readout",
            ),
        ),
    ),
)
