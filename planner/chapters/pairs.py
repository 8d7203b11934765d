"""Exchange gates: error of each pair's gate, the phase that residual exchange leaves, and their share of the sequence."""

from __future__ import annotations

from planner.declare import Ask, Compare, Derived, Limit, Per, Unknown, optional
from planner.kinds import FRACTION
from planner.physics import exchange
from planner.switches import HAS_PAIRS

_NO_NOISE = Unknown("the noise of one of its qubits is not known, or the qubit is dead")

DERIVEDS = (
    Derived(
        "pair.difference",
        exchange.difference_noise,
        {
            "noise": optional("noise.total"),
            "first": optional("pair.first_place"),
            "second": optional("pair.second_place"),
        },
        per=Per.PAIR,
        shown=False,
        unknown=_NO_NOISE,
    ),
    Derived(
        "pair.error",
        exchange.exchange_gate_error,
        {
            "exchange": "pair.exchange",
            "exchange_noise": "pair.exchange_noise",
            "gate_time": "pair.gate_time",
            "lowest": "calibration.lowest",
            "difference": "pair.difference",
        },
        per=Per.PAIR,
        heading="error",
        help="average infidelity of one exchange gate, of noise of the exchange and of the frequency difference",
    ),
    Derived(
        "pair.idle_phase",
        exchange.idle_exchange_phase,
        {"residual": "pair.residual_exchange", "wait": "workload.longest_wait"},
        per=Per.PAIR,
        heading="idle phase",
        display="rad",
        help="phase of the residual exchange over the longest wait",
    ),
    Derived(
        "pair.share",
        exchange.exchange_share,
        {
            "error": optional("pair.error"),
            "first": optional("pair.first_place"),
            "second": optional("pair.second_place"),
            "gates": "workload.exchange_gates",
            "frequency": "larmor.frequency",
        },
        shown=False,
        unknown=Unknown("the error of one of its pairs is not known"),
    ),
    Derived(
        "pair.error_left",
        exchange.error_left,
        {"allowed": "workload.allowed_sequence_error", "exchange": "pair.share"},
        shown=False,
    ),
)

LIMITS = (
    Limit(
        "pair",
        "the error of one exchange gate stays within what is allowed",
        (Compare("workload.allowed_pair_error", "pair.error", FRACTION),),
        per=Per.PAIR,
        asked=(Ask(HAS_PAIRS, "no pairs"),),
    ),
)
