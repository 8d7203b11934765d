"""Benchmarks: each prints a ratio to a floor that is timed in the same run, in turns."""
