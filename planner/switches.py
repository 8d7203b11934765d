"""Conditions on single givens that decide which results a plan needs."""

from __future__ import annotations

from planner.declare import Switch

IS_LOOSE = Switch("clock.loose", lambda choice: choice != "none")
REFOCUSED = Switch("workload.refocusing_pulses", lambda pulses: pulses > 0)
FREE = Switch("workload.refocusing_pulses", lambda pulses: pulses == 0)
RANDOMISED = Switch("workload.accumulation", lambda choice: choice == "randomised")
ALIGNED = Switch("workload.accumulation", lambda choice: choice == "aligned")
PARITY = Switch("workload.readout", lambda choice: choice == "parity")
ENERGY_SELECTIVE = Switch("workload.readout", lambda choice: choice == "energy")
HAS_VALLEYS = Switch("host.valleys", lambda has: has > 0)
