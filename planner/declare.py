"""What a law, a given, a result and a limit are. Declarations only: nothing here computes.

A *law* is a published formula: a pure keyword-only function whose arguments and result have kinds. A *given* is a value
of the plan, declared on the field of its chapter's dataclass. A *derived* names a result, the law that gives it and where
the law's arguments come from. A *limit* compares what is allowed with what is expected and so makes a margin.
"""

from __future__ import annotations

import dataclasses
import inspect
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from enum import Enum, IntEnum
from typing import Any, NamedTuple, TypeVar

from planner.kinds import Kind, Quantity

Function = TypeVar("Function", bound=Callable[..., Any])

Typed = Quantity | None  # what a chapter's field holds: a quantity or a word as typed, None where nothing was
Word = str | None
OWN = "definition"  # reference key of a definition of this program rather than a published formula


@dataclass(frozen=True, slots=True)
class Law:
    """A published formula behind one function: kinds of result and arguments, reference key and place in it."""

    function: Callable[..., Any]
    result: Kind
    arguments: Mapping[str, Kind]
    reference: str
    place: str

    @property
    def name(self) -> str:
        """The function's name in words."""
        return self.function.__name__.replace("_", " ")


def law(result: Kind, *, reference: str = OWN, place: str = "", **arguments: Kind) -> Callable[[Function], Function]:
    """Declare a function as a law; the keyword arguments are the kinds of its arguments.

    Raises TypeError where the names differ from the function's own keyword-only parameters.
    """

    def declare(function: Function) -> Function:
        parameters = inspect.signature(function).parameters.values()
        names = [p.name for p in parameters if p.kind is p.KEYWORD_ONLY]
        if names != list(arguments) or len(names) != len(parameters):
            raise TypeError(f"law {function.__name__}: declared {list(arguments)}, takes {names}, keyword-only")
        function.law = Law(function, result, arguments, reference, place)  # type: ignore[attr-defined]
        return function

    return declare


def law_of(function: Callable[..., Any]) -> Law:
    """The declaration of a law's function."""
    declared: Law = function.law  # type: ignore[attr-defined]
    return declared


class Nature(Enum):
    """Whether a given is ours to set, ours to learn, or what we ask of the run."""

    CHOICE = "choice"
    FACT = "fact"
    DEMAND = "demand"


class Lock(IntEnum):
    """The moment after which a choice can't be changed, in the order of a cooldown."""

    WAFER = 1
    BONDING = 2
    CLOSING = 3
    COOLING = 4
    RAMP = 5
    OPEN = 6

    @property
    def word(self) -> str:
        """The word used in plans and on screen."""
        return self.name.lower()


class Missing(Enum):
    """What an absent given means."""

    REQUIRED = "required"
    UNKNOWN = "unknown"  # results that need it are unknown
    OFF = "not counted"
    DEFAULT = "default"
    MATERIAL = "material"  # the material's value
    FOUND = "found"  # computed from results


class Form(Enum):
    """How a given is written in the file."""

    QUANTITY = "quantity"
    TEXT = "text"
    CHOICE = "choice"
    DATE = "date"


@dataclass(frozen=True, slots=True)
class Given:
    """One value of the plan.

    `sizes` are the accepted numbers of components, `options` the words of a choice with a line of explanation each.
    The value must lie above `above`, at or above `least`, below `below` and at or below `most` (SI; None: no bound).
    `zero_unset`: a 0 counts as absent; `nonzero`: not every component may be 0; `per_stage`: one number for each stage.
    `example` is a text that would be accepted, `sensible` what people use.
    """

    form: Form
    help: str
    nature: Nature
    kind: Kind | None = None
    locks: Lock | None = None
    missing: Missing = Missing.UNKNOWN
    default: str = ""
    sizes: tuple[int, ...] = (1,)
    options: Mapping[str, str] = field(default_factory=dict)
    above: float | None = None
    least: float | None = None
    below: float | None = None
    most: float | None = None
    zero_unset: bool = False
    nonzero: bool = False
    per_stage: bool = False
    example: str = ""
    sensible: str = ""


def given(form: Form | Kind, help: str, nature: Nature, *, locks: Lock | None = None, **rest: Any) -> Any:
    """A dataclass field that declares a given; the field holds what was typed, or None."""
    kind = form if isinstance(form, Kind) else None
    declared = Given(
        form=Form.QUANTITY if isinstance(form, Kind) else form, kind=kind, help=help, nature=nature, locks=locks, **rest
    )
    return dataclasses.field(default=None, metadata={"given": declared})


def givens_of(chapter: type) -> dict[str, Given]:
    """The givens that a chapter's dataclass declares, by field name, in the order of the file."""
    return {f.name: f.metadata["given"] for f in dataclasses.fields(chapter) if "given" in f.metadata}


class Per(Enum):
    """What a result is one of: of the plan, or of the rows of this table."""

    PLAN = ""
    QUBIT = "qubit"
    COIL = "coil"
    STAGE = "stage"
    LINE = "line"
    PART = "part"
    PAIR = "pair"


@dataclass(frozen=True, slots=True)
class Switch:
    """A condition on one given of the plan: `on` gets its SI value, or its word for a choice; None: any row types it."""

    key: str
    on: Callable[[Any], bool] | None = None


@dataclass(frozen=True, slots=True)
class Input:
    """Where an argument of a law comes from: the `key` of a given or result, or the tolerance of a given.

    `optional`: an unknown is passed on as nan instead of making the result unknown. `word`: 1 where the choice is this
    word, else 0. `unless`: not needed in rows that type this given. `when`: needed only while all of these are on; the
    law sees nan otherwise.
    """

    key: str
    optional: bool = False
    tolerance: bool = False
    word: str | None = None
    unless: str = ""
    when: tuple[Switch, ...] = ()


def optional(key: str) -> Input:
    """An argument that may be unknown: the law sees nan."""
    return Input(key, optional=True)


def tolerance(key: str) -> Input:
    """The standard uncertainty of a given in SI units, 0 where none was typed."""
    return Input(key, tolerance=True)


def word(key: str, option: str) -> Input:
    """1 where the choice `key` is `option`, else 0."""
    return Input(key, word=option)


@dataclass(frozen=True, slots=True)
class Unknown:
    """Why a law found no value although all its arguments are known, and the given (if any) to type instead."""

    reason: str
    given: str = ""


@dataclass(frozen=True, slots=True)
class Bound:
    """A result that is only an upper bound where the law `where` (of `inputs`) gives true, and what the reader is told.

    `least` is the share of it that it may be; 0: it may be anything below.
    """

    where: Callable[..., Any]
    inputs: Mapping[str, str]
    note: str
    least: float = 0.0


@dataclass(frozen=True, slots=True)
class Derived:
    """A result: its key, the law and the sources of the law's arguments.

    A key that is also a given's is the value found for it where the plan is silent. `shown` is False for steps on the way
    that no surface lists; `only` is the switch without which there is no such result
    (for the reason `off`), `trailing` the shape of one row's value. `heading` is the short name in grids,
    `display` the unit it is shown in ("" lets the size of the number choose), `digits` the significant digits shown.
    """

    key: str
    law: Callable[..., Any]
    inputs: Mapping[str, str | Input]
    help: str = ""
    per: Per = Per.QUBIT
    unknown: Unknown | None = None
    bound: Bound | None = None
    shown: bool = True
    only: Switch | None = None
    off: Unknown = Unknown("")
    trailing: tuple[int, ...] = ()
    heading: str = ""
    display: str = ""
    digits: int = 3
    sources: Mapping[str, Input] = field(init=False)

    def __post_init__(self) -> None:
        """The arguments' sources, each as an `Input`."""
        sources = {name: Input(source) if isinstance(source, str) else source for name, source in self.inputs.items()}
        object.__setattr__(self, "sources", sources)

    @property
    def kind(self) -> Kind:
        """The kind of the result."""
        return law_of(self.law).result


@dataclass(frozen=True, slots=True)
class Compare:
    """One comparison inside a limit: the keys of what is allowed and what is expected, and when it is made.

    `kind` is that of both in reports. `when` is a switch, `only_with` are givens without which a row is not compared;
    `what` says in a few words what is compared, for limits with more than one comparison; `gap` phrases how both stand.
    """

    allowed: str
    expected: str
    kind: Kind
    when: Switch | None = None
    only_with: tuple[str, ...] = ()
    what: str = ""
    gap: str = "{expected} of {allowed} {unit} allowed"


class Ask(NamedTuple):
    """A switch that must be on for a margin to be asked, and the reason it is not asked while the switch is off."""

    switch: Switch
    otherwise: str


@dataclass(frozen=True, slots=True)
class Limit:
    """The bound on a result, which makes the margin of the same name; of several comparisons the worst counts.

    It is asked while every switch of `asked` is on. `per` is what its own rows are, for limits whose comparisons are of
    different rows that of the plan. `none_made` is why it is unknown where no comparison can be made. `tight_counts` is
    False for a bound that is met or not, never tight; `quiet` margins stay out of the first screen while they are above 10.
    """

    name: str
    meaning: str
    compares: tuple[Compare, ...]
    per: Per = Per.QUBIT
    asked: tuple[Ask, ...] = ()
    none_made: Unknown = Unknown("")
    tight_counts: bool = True
    quiet: bool = False


class Chapter:
    """Marker base of the chapters' dataclasses: their fields are givens."""

    __slots__ = ()
