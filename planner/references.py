"""The bibliography: `data/references.toml` holds each source once, code and materials name it by key."""

from __future__ import annotations

import tomllib
from dataclasses import dataclass
from functools import cache
from importlib.resources import files


@dataclass(frozen=True, slots=True)
class Reference:
    """One source: its key, the full citation, and how far it was read (`read`, `abstract`, `memory`, `own`)."""

    key: str
    text: str
    seen: str


@cache
def references() -> dict[str, Reference]:
    """All shipped references by key."""
    table = tomllib.loads(files("planner.data").joinpath("references.toml").read_text("utf-8"))
    return {key: Reference(key, entry["text"], entry["seen"]) for key, entry in table.items()}
