"""Conditions on single givens and results that decide which results and margins a plan needs."""

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
HAS_PARTNERS = Switch("tones.partners", lambda others: others > 0)
REACHES_ALL = Switch("tones.reaches_all", lambda reached: reached > 0)
# Without a test: on where any row types the given, or, for names, where there is any row.
HAS_COILS = Switch("coil.name")
HAS_STEP = Switch("coil.step")
HAS_STAGES = Switch("stage.name")
HAS_DRIVE = Switch("line.device_power")
HAS_PARTS = Switch("part.judged")
HAS_PAIRS = Switch("pair.name")
HAS_PHASE_NOISE = Switch("phase_noise.offset")
HAS_MICROMAGNET = Switch("chip.micromagnet_field")
