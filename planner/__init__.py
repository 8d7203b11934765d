"""Cooldown planner for spin-qubit devices: one plan per device and cooldown, every consequence recomputed on each edit."""

__version__ = "0.1.0"
