"""Plans for tests, from dotted keys: `plan_of({"magnet.field": "420 mT", "qubit.Q2.g": 2.0})`."""

from __future__ import annotations

from collections.abc import Mapping

from planner.evaluate import Evaluation
from planner.plan import Plan
from planner.planfile import read

Entry = str | int | float | None
# Every margin of this plan is known; a test changes what it is about, None takes a line out.
BENCH: Mapping[str, Entry] = {
    "format": 1,
    "magnet.field": "500 mT", "magnet.rating": "1 T",
    "source.low": "1 GHz", "source.high": "18 GHz",
    "chip.material": "si-sige-natural", "chip.electron_temperature": "100 mK",
    "workload.gates": 100, "workload.longest_wait": "1 us",
    "qubit.Q1.g": 2.0, "qubit.Q1.rabi_frequency": "2 MHz", "qubit.Q1.valley_splitting": "150 ueV",
    "qubit.Q1.frequency_noise": "3 kHz/rtHz",
}  # fmt: skip


def second(name: str = "Q2", **changed: Entry) -> dict[str, Entry]:
    """The givens of one more qubit like Q1 of the bench plan, in a local field of 10 mT."""
    like = {key.rpartition(".")[2]: value for key, value in BENCH.items() if key.startswith("qubit.Q1.")}
    return {f"qubit.{name}.{key}": value for key, value in ({"local_field": "10, 0, 0 mT"} | like | changed).items()}


def text_of(givens: Mapping[str, Entry]) -> str:
    """TOML text of these givens."""
    heads: dict[str, list[str]] = {"": []}
    for key, value in givens.items():
        table, _, name = key.rpartition(".")
        head, _, row = table.partition(".")
        lines = heads.setdefault(f"[[{head}]]\nname = '{row}'" if row else f"[{head}]" if head else "", [])
        if value is not None:
            lines.append(f"{name} = '{value}'" if isinstance(value, str) else f"{name} = {value}")
    return "\n".join("\n".join((head, *lines)) for head, lines in heads.items())


def plan_of(changes: Mapping[str, Entry] | None = None) -> Plan:
    """The bench plan with these changes."""
    return read(text_of({**BENCH, **(changes or {})}), "bench.toml").plan


def of(evaluation: Evaluation, key: str, row: int = 0) -> float:
    """One number of an evaluation without swept givens; nan where it is unknown."""
    return float(evaluation.columns[key].base()[row])


def why(evaluation: Evaluation, key: str, row: int = 0) -> str:
    """The reason of an unknown, '' where there is none."""
    return str(evaluation.columns[key].why.get(row, ""))
