"""The laws against the outside: published numbers, other programs and integrals, each beside its source.

Rows marked `regression` are numbers computed once for this program: they guard against change and prove nothing else.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np

from planner.physics import Array

_STUDY = (1.0, 2.0, 3.0)


def row(*values: float) -> Array:
    """One number a qubit."""
    return np.array(values, dtype=float)


def assert_axes_agree(law: Callable[..., Any], *, coupled: bool = False, **arguments: Array) -> None:
    """A law gives with a study's leading axis (on one argument, then on all) what it gives entry by entry and row by row.

    `coupled` laws look at all rows together (the nearest neighbour, say) and are not taken apart by row.
    """
    stacked = {name: np.stack([factor * value for factor in _STUDY]) for name, value in arguments.items()}
    for swept in [{name: stack} for name, stack in stacked.items()] + [stacked]:
        together = law(**{**arguments, **swept})
        for entry in range(len(_STUDY)):
            single = {**arguments, **{name: stack[entry] for name, stack in swept.items()}}
            _assert_same(together[entry], law(**single))
            if not coupled:
                _assert_same(together[entry], _row_by_row(law, single))


def _row_by_row(law: Callable[..., Any], arguments: dict[str, Array]) -> Array:
    rows = max(len(value) for value in arguments.values())
    alone = [law(**{name: value if len(value) == 1 else value[r : r + 1] for name, value in arguments.items()})
             for r in range(rows)]
    return np.concatenate(alone)


def _assert_same(left: Array, right: Array) -> None:
    np.testing.assert_allclose(np.broadcast_to(left, right.shape), right, rtol=1e-11, atol=0)
