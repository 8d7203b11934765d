"""The coincidence of Zeeman energy and valley splitting, where relaxation is fastest."""

from __future__ import annotations

from planner.declare import Ask, Compare, Derived, Limit, Unknown
from planner.kinds import ENERGY
from planner.physics import thermal
from planner.switches import HAS_VALLEYS

DERIVEDS = (
    Derived(
        "valley.distance",
        thermal.valley_distance,
        {"energy": "larmor.energy", "valley_splitting": "qubit.valley_splitting"},
        only=HAS_VALLEYS,
        off=Unknown("the host has no valleys"),
        heading="valley gap",
        display="ueV",
        help="distance of Zeeman energy and valley splitting",
    ),
)

LIMITS = (
    Limit(
        "valley",
        "Zeeman energy and valley splitting keep their distance",
        (Compare("valley.distance", "workload.valley_window", ENERGY, gap="gap {allowed} of {expected} {unit}"),),
        asked=(Ask(HAS_VALLEYS, "the host has no valleys"),),
    ),
)
