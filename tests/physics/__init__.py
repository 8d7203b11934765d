"""The laws against the outside: published numbers, other programs and integrals, each beside its source.

Rows marked `regression` are numbers computed once for this program: they guard against change and prove nothing else.
"""

from __future__ import annotations

import warnings
from collections.abc import Callable
from typing import Any

import numpy as np
import pytest

from planner.physics import Array

with warnings.catch_warnings():  # qutip warns on import where no plotting package is installed; none is needed here
    warnings.filterwarnings("ignore", message="matplotlib not found")
    import qutip  # type: ignore[import-untyped]

__all__ = ["assert_axes_agree", "assert_axes_agree_together", "near", "qutip", "row"]

_STUDY = (1.0, 2.0, 3.0)


def row(*values: float) -> Array:
    """One number a qubit."""
    return np.array(values, dtype=float)


def near(expected: Any, *, rel: float = 1e-6, abs: float = 0.0) -> Any:
    """Equal within `rel` alone: pytest's own default accepts 1e-12 around anything, as much as a clock deviation."""
    return pytest.approx(expected, rel=rel, abs=abs)


def assert_axes_agree(law: Callable[..., Any], **arguments: Array) -> None:
    """With a study's leading axis on one argument, then on all, a law gives what each entry and row alone gives."""
    _assert_axes_agree(law, arguments, apart=True)


def assert_axes_agree_together(law: Callable[..., Any], **arguments: Array) -> None:
    """The same for a law that looks at all rows together (the nearest neighbour): it is not taken apart by row."""
    _assert_axes_agree(law, arguments, apart=False)


def _assert_axes_agree(law: Callable[..., Any], arguments: dict[str, Array], *, apart: bool) -> None:
    stacked = {name: np.stack([factor * value for factor in _STUDY]) for name, value in arguments.items()}
    for swept in [{name: stack} for name, stack in stacked.items()] + [stacked]:
        together = law(**{**arguments, **swept})
        for entry in range(len(_STUDY)):
            single = {**arguments, **{name: stack[entry] for name, stack in swept.items()}}
            _assert_same(together[entry], law(**single))
            if apart:
                _assert_same(together[entry], _row_by_row(law, single))


def _row_by_row(law: Callable[..., Any], arguments: dict[str, Array]) -> Array:
    rows = max(len(value) for value in arguments.values())
    alone = [
        law(**{name: value if len(value) == 1 else value[r : r + 1] for name, value in arguments.items()})
        for r in range(rows)
    ]
    return np.concatenate(alone)


def _assert_same(left: Array, right: Array) -> None:
    np.testing.assert_allclose(np.broadcast_to(left, right.shape), right, rtol=1e-11, atol=0)
