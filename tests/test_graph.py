"""The graph of declarations: misfits are reported together, the order can be computed, the shipped chapters fit."""

from __future__ import annotations

import ast
from dataclasses import replace
from pathlib import Path

import pytest

from planner import chapters
from planner.declare import Ask, Bound, Compare, Derived, Form, Input, Limit, Lock, Switch, law, word
from planner.graph import CHAPTERS, DERIVEDS, LIMITS, WiringError, build, givens, graph
from planner.kinds import ANGLE, COUNT, FIELD, FREQUENCY, NUMBER, TIME
from planner.physics import Array


@law(FREQUENCY, field=FIELD)
def tone(*, field: Array) -> Array:
    """A frequency of a field."""
    return field


@law(FREQUENCY, frequency=FREQUENCY)
def shifted(*, frequency: Array) -> Array:
    """A frequency of a frequency."""
    return frequency


@law(NUMBER, number=NUMBER)
def number(*, number: Array) -> Array:
    """A number of a number."""
    return number


@law(TIME, frequency=FREQUENCY)
def period(*, frequency: Array) -> Array:
    """A time of a frequency."""
    return 1 / frequency


@law(NUMBER, count=COUNT)
def counted(*, count: Array) -> Array:
    """A number of a count."""
    return count


FIRST = Derived("test.tone", tone, {"field": "magnet.field"})
NEXT = Derived("test.shifted", shifted, {"frequency": "test.tone"})


def misfits(*deriveds: Derived, limits: tuple[Limit, ...] = ()) -> list[str]:
    """The lines of the error that these declarations make."""
    with pytest.raises(WiringError) as caught:
        build(deriveds, limits)
    return str(caught.value).split("\n")


def limit(allowed: str, expected: str) -> Limit:
    """A limit on frequencies."""
    return Limit("test", "a limit for a test", (Compare(allowed, expected, FREQUENCY),))


# -- laws


def test_a_law_declares_the_arguments_that_its_function_takes() -> None:
    with pytest.raises(TypeError, match=r"law other: declared \['field'\], takes \['frequency'\]"):

        @law(FREQUENCY, field=FIELD)
        def other(*, frequency: Array) -> Array:
            return frequency


def test_a_laws_arguments_are_keyword_only() -> None:
    with pytest.raises(TypeError, match="keyword-only"):

        @law(FREQUENCY, field=FIELD)
        def other(field: Array) -> Array:
            return field


# -- misfits

MISFITS: dict[str, tuple[tuple[Derived, ...], tuple[Limit, ...], str]] = {
    "unknown name": ((Derived("test.tone", tone, {"field": "magnet.feild"}),), (),
        "test.tone: field comes from unknown 'magnet.feild', did you mean magnet.field?"),
    "unknown result": ((FIRST, Derived("test.shifted", shifted, {"frequency": "test.tune"})), (),
        "test.shifted: frequency comes from unknown 'test.tune', did you mean test.tone?"),
    "unknown, nothing near": ((Derived("test.tone", tone, {"field": "zzzzzz"}),), (),
        "test.tone: field comes from unknown 'zzzzzz'"),
    "wrong kind of a given": ((Derived("test.tone", tone, {"field": "magnet.azimuth"}),), (),
        "test.tone: field is a field, magnet.azimuth is a angle"),
    "wrong kind of a result": ((FIRST, Derived("test.other", tone, {"field": "test.tone"})), (),
        "test.other: field is a field, test.tone is a frequency"),
    "a word is a number": ((Derived("test.tone", tone, {"field": word("magnet.mode", "driven")}),), (),
        "test.tone: field is a field, magnet.mode is a number"),
    "wrong arguments": ((Derived("test.tone", tone, {"fild": "magnet.field"}),), (),
        "test.tone: tone takes ['field'], gets ['fild']"),
    "missing argument": ((Derived("test.tone", tone, {}),), (), "test.tone: tone takes ['field'], gets []"),
    "declared twice": ((FIRST, FIRST), (), "test.tone: declared twice"),
    "a given that is not found": ((Derived("magnet.rating", tone, {"field": "magnet.field"}),), (),
        "magnet.rating: is a given, of another kind or not found from results"),
    "a found given of another kind": ((Derived("calibration.wait", tone, {"field": "magnet.field"}),), (),
        "calibration.wait: is a given, of another kind or not found from results"),
    "unknown in a limit": ((FIRST,), (limit("test.tune", "test.tone"),),
        "margin test: unknown 'test.tune', did you mean test.tone?"),
    "wrong kind in a limit": ((FIRST,), (limit("test.tone", "magnet.field"),),
        "margin test: magnet.field is a field, compared as frequency"),
}  # fmt: skip


@pytest.mark.parametrize("case", MISFITS)
def test_a_misfit_is_reported(case: str) -> None:
    deriveds, limits, sentence = MISFITS[case]
    assert misfits(*deriveds, limits=limits) == [sentence]


def test_all_misfits_are_reported_at_once() -> None:
    found = misfits(
        Derived("test.tone", tone, {"field": "magnet.feild"}),
        Derived("test.other", tone, {"field": "magnet.azimuth"}),
        limits=(limit("test.tone", "test.nothing"),),
    )
    assert len(found) == 3


def test_a_circle_is_named() -> None:
    circle = (
        Derived("test.a", shifted, {"frequency": "test.c"}),
        Derived("test.b", shifted, {"frequency": "test.a"}),
        Derived("test.c", shifted, {"frequency": "test.b"}),
    )
    (sentence,) = misfits(*circle)
    assert "in a circle" in sentence
    assert all(key in sentence for key in ("test.a", "test.b", "test.c"))


def test_a_circle_through_a_switch_is_one_too() -> None:
    circle = (
        Derived("test.a", number, {"number": Input("source.image", when=None)}),
        Derived("test.b", shifted, {"frequency": Input("source.low", unless="test.c")}),
        Derived("test.c", shifted, {"frequency": "test.b"}),
    )
    assert "test.b" in misfits(*circle[1:])[0]


# -- what a graph says


def test_the_order_can_be_computed_and_givens_in_use_are_listed() -> None:
    built = build((NEXT, FIRST), (limit("source.guard", "test.shifted"),))
    assert [derived.key for derived in built.order] == ["test.tone", "test.shifted"]
    assert set(built.needed) == {"magnet.field", "source.guard"}
    assert built.upstream["test.shifted"] == {"test.tone", "magnet.field"}


def test_switches_and_exceptions_lie_upstream() -> None:
    built = build(
        (
            Derived("test.tone", tone, {"field": Input("magnet.rating", unless="chip.micromagnet_field")}),
            Derived("test.shifted", shifted, {"frequency": Input("test.tone", when=(Switch("clock.loose", bool),))},
                    only=Switch("workload.readout", bool)),
        ),
        (),
    )  # fmt: skip
    assert built.upstream["test.shifted"] >= {
        "clock.loose",
        "workload.readout",
        "magnet.rating",
        "chip.micromagnet_field",
    }


def test_what_the_material_brings_depends_on_its_choice() -> None:
    alone = build((Derived("test.counted", counted, {"count": "model.nuclei"}),), ())
    assert alone.upstream["test.counted"] == {"model.nuclei", "chip.material"}
    assert "chip.material" in graph().upstream["noise.nuclear"]
    assert "chip.material" not in graph().upstream["larmor.frequency"]


def test_until_is_the_latest_lock_upstream() -> None:
    cases = [("source.high", "test.shifted", Lock.OPEN), ("source.high", "source.guard", Lock.CLOSING),
             ("source.guard", "source.guard", None)]  # fmt: skip
    limits = tuple(replace(limit(allowed, expected), name=f"test{n}") for n, (allowed, expected, _) in enumerate(cases))
    built = build((FIRST, NEXT), limits)
    assert [built.until(declared.compares) for declared in limits] == [locks for *_, locks in cases]


# -- the shipped chapters


def test_the_shipped_graph_fits() -> None:
    built = graph()
    assert len(built.order) == len(DERIVEDS)
    seen: set[str] = set()
    for derived in built.order:
        inputs = {source.key for source in derived.sources.values()} - {derived.key}
        assert inputs & {other.key for other in DERIVEDS} <= seen, derived.key
        seen.add(derived.key)


def test_every_chapter_that_declares_results_is_gathered() -> None:
    gathered = {chapter.__name__.rpartition(".")[2] for chapter in CHAPTERS}
    for path in Path(chapters.__path__[0]).glob("*.py"):
        declares = [node for node in ast.parse(path.read_text("utf-8")).body if isinstance(node, ast.Assign)
                    and any(isinstance(t, ast.Name) and t.id in ("DERIVEDS", "LIMITS") for t in node.targets)
                    and not (isinstance(node.value, ast.Tuple) and not node.value.elts)]  # fmt: skip
        assert not declares or path.stem in gathered, path.name


def test_results_are_in_the_words_of_the_contract() -> None:
    shown = {derived.key for derived in DERIVEDS if derived.shown}
    assert shown >= {
        "larmor.field", "larmor.g", "larmor.axis", "larmor.energy", "larmor.frequency", "larmor.field_slope",
        "larmor.elevation_slope", "larmor.azimuth_slope", "larmor.spacing", "larmor.search_window", "noise.nuclear",
        "noise.barrier", "noise.magnet", "noise.drift", "noise.calibration", "noise.clock", "noise.loose",
        "noise.charge_amplitude", "noise.charge", "noise.white", "noise.total", "noise.unexplained",
            "coherence.t2_star",
        "coherence.t2_echo", "coherence.wait_phase", "coherence.gate_error", "coherence.error_per_gate",
        "coherence.sequence_time", "coherence.gates_randomised", "coherence.gates_aligned", "coherence.sequence_error",
        "coherence.reachable_gates", "coherence.allowed_noise", "clock.required_accuracy", "clock.change",
        "clock.required_stability", "clock.stability", "clock.required_mismatch", "thermal.ratio", "thermal.excited",
        "thermal.readout_error", "valley.distance", "calibration.wait", "calibration.record_length",
        "clock.deviation_100s", "workload.gate_time", "workload.blockade_window", "source.lo",
    }  # fmt: skip
    assert all(derived.help for derived in DERIVEDS if derived.shown)


def test_margins_have_their_names_and_a_meaning() -> None:
    names = [limit.name for limit in LIMITS]
    assert len(names) == len(set(names))
    assert set(names) >= {"band", "rating", "drift", "field-noise", "clock", "loose-clock", "calibration", "wait",
        "gate",
                          "sequence", "readout", "valley"}  # fmt: skip
    for declared in LIMITS:
        assert declared.meaning
        assert "\n" not in declared.meaning
        assert all(ask.otherwise for ask in declared.asked)


def test_a_margin_of_the_plan_compares_what_a_plan_has_one_of() -> None:
    """A limit of the plan may also compare coils, each with its own; never one row with one of another table."""
    per = {derived.key: derived.per.value for derived in DERIVEDS}
    for declared in LIMITS:
        for compare in declared.compares:
            tables = {per.get(key, key.partition(".")[0] if key.startswith(("qubit.", "coil.")) else "")
                      for key in (compare.allowed, compare.expected)}  # fmt: skip
            assert len(tables - {""}) <= 1, declared.name


# -- every name is checked

HIDDEN: dict[str, tuple[tuple[Derived, ...], tuple[Limit, ...]]] = {
    "unless": ((Derived("test.tone", tone, {"field": Input("magnet.field", unless="qubit.t2star")}),), ()),
    "when": ((Derived("test.tone", tone, {"field": Input("magnet.field", when=(Switch("clock.lose", bool),))}),), ()),
    "only": ((Derived("test.tone", tone, {"field": "magnet.field"}, only=Switch("clock.lose", bool)),), ()),
    "bound": ((Derived("test.tone", tone, {"field": "magnet.field"}, bound=Bound(period, {"frequency": "test.tune"},
        "a note")),), ()),
    "asked": ((FIRST,), (Limit("test", "a limit", (Compare("test.tone", "source.low", FREQUENCY),),
        asked=(Ask(Switch("clock.lose", bool), "a reason"),)),)),
    "compared when": ((FIRST,), (Limit("test", "a limit", (Compare("test.tone", "source.low", FREQUENCY,
        when=Switch("clock.lose", bool)),)),)),
    "compared only with": ((FIRST,), (Limit("test", "a limit", (Compare("test.tone", "source.low", FREQUENCY,
        only_with=("qubit.t11",)),)),)),
    "itself": ((Derived("test.a", shifted, {"frequency": "test.a"}),), ()),
    "margin declared twice": ((FIRST,), (limit("test.tone", "source.low"), limit("source.low", "test.tone"))),
}  # fmt: skip


@pytest.mark.parametrize("case", HIDDEN)
def test_every_name_in_a_declaration_is_checked(case: str) -> None:
    deriveds, limits = HIDDEN[case]
    with pytest.raises(WiringError):
        build(deriveds, limits)


def test_a_switch_on_the_host_depends_on_the_material() -> None:
    assert "chip.material" in graph().upstream["valley.distance"]


def test_a_given_that_counts_now_is_used() -> None:
    used = set(graph().needed)
    silent = {key for key, given in givens().items() if key not in used and given.form is Form.QUANTITY}
    assert silent == {"format", "cooldown", "wanted_margin"}
    assert ANGLE in {given.kind for given in givens().values()}
