"""The plan file: what loading reads, and saving that changes the lines that changed and nothing else."""

from __future__ import annotations

import tomllib
from collections.abc import Sequence
from difflib import unified_diff
from pathlib import Path
from random import Random

import pytest
from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st

from planner import planfile
from planner.chapters.qubit import Qubit
from planner.durable import ReadError, SaveError
from planner.plan import Address, Plan, address_of, addresses, stated, with_rows
from planner.planfile import ChangedOnDisk, Document, PlanError, house_form, load, read, save, text_of
from planner.soundness import edited, problems
from planner.values import GivenError, read_value

PLANS = sorted((Path(__file__).parents[1] / "plans").glob("*.toml"))

TYPED = """\
# Cooldown 14
format = 1   # of the file
title  =  'six electrons'

[magnet]
# set at the supply
field = "500 mT"   # first draft
rating = "1 T; datasheet"

[chip]
material = "si-sige-natural"

[workload]
gates = 100

# the qubits, from left to right
[[qubit]]
name = "Q1"
g = 2.00
t1 = "80 ms; measured CD12"  # at the old field

[[qubit]]
name = "Q2"
g = "1.99"

# the end
"""


def plan_after(text: str, *edits: tuple[str, str]) -> tuple[Document, Plan]:
    """The document of a text, and its plan after these givens were typed."""
    document = read(text, "plan.toml")
    plan = document.plan
    for key, typed in edits:
        plan = edited(plan, address_of(plan, key), typed)
    return document, plan


def changed(text: str, *edits: tuple[str, str]) -> list[str]:
    """The lines that saving takes out (-) and puts in (+)."""
    document, plan = plan_after(text, *edits)
    return differences(text, patched(document, plan))


def patched(document: Document, plan: Plan) -> str:
    """The text to save, which must not be in house form and must mean the plan."""
    text, in_house_form = text_of(document, plan)
    assert not in_house_form
    assert read(text, "plan.toml", keep_unknown=True).plan == plan
    return text


def differences(before: str, after: str) -> list[str]:
    lines = unified_diff(before.splitlines(), after.splitlines(), lineterm="", n=0)
    return [line for line in lines if line[:2] not in ("--", "++", "@@")]


# -- one value, one line


def test_a_changed_given_replaces_its_value_and_leaves_the_rest_of_the_line() -> None:
    assert changed(TYPED, ("magnet.field", "350 mT; measured")) == [
        '-field = "500 mT"   # first draft',
        '+field = "350 mT; measured"   # first draft',
    ]
    assert changed(TYPED, ("title", "seven")) == ["-title  =  'six electrons'", '+title  =  "seven"']


def test_a_number_stays_a_number_and_a_text_a_text() -> None:
    assert changed(TYPED, ("qubit.Q1.g", "1.98"), ("qubit.Q2.g", "1.98"), ("workload.gates", "1e3")) == [
        "-gates = 100", "+gates = 1000", "-g = 2.00", "+g = 1.98", '-g = "1.99"', '+g = "1.98"',
    ]  # fmt: skip
    assert changed(TYPED, ("qubit.Q1.g", "1.98(1); measured")) == ["-g = 2.00", '+g = "1.98(1); measured"']
    assert changed(TYPED, ("qubit.Q1.g", "1.980")) == ["-g = 2.00", '+g = "1.980"']  # as a number the zero would go


def test_a_new_given_goes_where_the_order_puts_it() -> None:
    assert changed(TYPED, ("magnet.azimuth", "51 deg")) == ['+azimuth = "51 deg"']
    typed = (("magnet.azimuth", "51 deg"), ("device", "SQ6"), ("qubit.Q1.local_field", "1, 0, 0 mT"))
    text = patched(*plan_after(TYPED, *typed))
    lines = text.splitlines()
    assert lines[lines.index('azimuth = "51 deg"') - 1].startswith("field =")
    assert lines[lines.index('device = "SQ6"') - 1].startswith("format =")
    assert lines[lines.index('local_field = "1, 0, 0 mT"') - 1] == "g = 2.00"


def test_a_given_of_a_new_table_brings_its_header() -> None:
    assert changed(TYPED, ("source.high", "18 GHz"), ("source.low", "1 GHz")) == [
        "+", "+[source]", '+low = "1 GHz"', '+high = "18 GHz"',
    ]  # fmt: skip
    text = patched(*plan_after(TYPED, ("source.low", "1 GHz")))
    assert text.index("[magnet]") < text.index("[source]") < text.index("[chip]")


def test_a_removed_given_takes_its_line_along() -> None:
    assert changed(TYPED, ("qubit.Q1.t1", "")) == ['-t1 = "80 ms; measured CD12"  # at the old field']


def test_line_ends_and_a_missing_last_one_stay() -> None:
    windows = TYPED.replace("\n", "\r\n").removesuffix("\r\n")
    document, plan = plan_after(windows, ("magnet.field", "1 T"), ("magnet.azimuth", "1 deg"))
    wanted = windows.replace('"500 mT"', '"1 T"').replace("# first draft\r\n", '# first draft\r\nazimuth = "1 deg"\r\n')
    assert patched(document, plan) == wanted


# -- rows


def row(name: str) -> Qubit:
    return Qubit(name=name, g=read_value(Address("qubit", 0, "g").given, "2.1"))  # type: ignore[arg-type]


def after_rows(*rows: Qubit) -> list[str]:
    document = read(TYPED, "plan.toml")
    return differences(TYPED, patched(document, with_rows(document.plan, "qubit", rows)))


def test_a_row_is_inserted_at_its_place() -> None:
    first, last = read(TYPED, "").plan.qubit
    block = ["+[[qubit]]", '+name = "Q3"', '+g = "2.1"']
    assert sorted(after_rows(first, row("Q3"), last)) == sorted([*block, "+"])
    document = read(TYPED, "")
    text = patched(document, with_rows(document.plan, "qubit", (first, row("Q3"), last)))
    assert text.index('"Q1"') < text.index('"Q3"') < text.index('"Q2"')
    assert text.endswith('g = "1.99"\n\n# the end\n')


def test_a_row_is_removed_with_its_lines_only() -> None:
    first, last = read(TYPED, "").plan.qubit
    assert after_rows(first) == ["-[[qubit]]", '-name = "Q2"', '-g = "1.99"', "-"]
    text = "\n".join(after_rows(last))
    assert "# the qubits" not in text
    assert "-t1 = " in text


def test_a_row_that_comes_back_gives_the_old_text() -> None:
    document = read(TYPED, "plan.toml")
    first, last = document.plan.qubit
    text = patched(document, with_rows(document.plan, "qubit", (first, row("Q3"), last)))
    longer = read(text, "plan.toml")
    assert patched(longer, document.plan) == TYPED


def test_a_renamed_row_keeps_its_lines() -> None:
    assert changed(TYPED, ("qubit.Q1.name", "left")) == ['-name = "Q1"', '+name = "left"']


def test_rows_that_change_places_are_written_in_their_new_order() -> None:
    document = read(TYPED, "plan.toml")
    plan = with_rows(document.plan, "qubit", document.plan.qubit[::-1])
    assert [entry["name"] for entry in tomllib.loads(patched(document, plan))["qubit"]] == ["Q2", "Q1"]


# -- what can't be changed by lines

MAGNET = TYPED[TYPED.index("[magnet]") : TYPED.index("[chip]")]
UNPATCHABLE = {
    "dotted key": TYPED.replace(MAGNET, 'magnet.field = "500 mT"\n'),
    "inline table": TYPED.replace(MAGNET, 'magnet = {field = "500 mT"}\n'),
    "text of several lines": TYPED.replace('"500 mT"', '"""500 \\\n   mT"""'),
}


@pytest.mark.parametrize("case", UNPATCHABLE)
def test_the_file_is_written_in_house_form_and_that_is_said(case: str) -> None:
    document, plan = plan_after(UNPATCHABLE[case], ("magnet.field", "350 mT"))
    text, in_house_form = text_of(document, plan)
    assert in_house_form
    assert read(text, "plan.toml").plan == plan
    assert "#" not in text
    assert '\n[magnet]\nfield = "350 mT"\n' in text


@pytest.mark.parametrize("case", UNPATCHABLE)
def test_without_an_edit_of_it_nothing_is_rewritten(case: str) -> None:
    text = UNPATCHABLE[case]
    document, plan = plan_after(text, ("workload.gates", "7"))
    assert differences(text, patched(document, plan)) == ["-gates = 100", "+gates = 7"]


def test_house_form_keeps_what_is_no_given() -> None:
    spoilt = (
        UNPATCHABLE["dotted key"]
        .replace("gates = 100", "gates = 100\nlater = [1, 2]")
        .replace("g = 2.00", "g = 2.00\nolder = {a = 1}")
    )
    document = read(f"other = 2\n{spoilt}\n[elsewhere]\nx = 1\n", "plan.toml", keep_unknown=True)
    text, in_house_form = text_of(document, edited(document.plan, Address("magnet", None, "field"), "1 T"))
    assert in_house_form
    data = tomllib.loads(text)
    assert (data["other"], data["workload"]["later"], data["qubit"][0]["older"]) == (2, [1, 2], {"a": 1})
    assert data["elsewhere"] == {"x": 1}


def test_a_new_file_parts_its_groups_by_blank_lines() -> None:
    document = read(PLANS[0].read_text(encoding="utf-8"), "")
    text = house_form(document.plan)
    assert read(text, "").plan == document.plan
    assert text.startswith('format = 1\n\ndevice = "')
    assert text_of(Document(None, "", document.plan), document.plan) == (text, False)
    keys = [line for line in text.splitlines() if " = " in line and line.startswith(("elevation", "azimuth", "mode"))]
    assert "\n".join(keys[:2]) + "\n\n" + keys[2] in text


def test_house_form_is_in_the_order_of_the_house() -> None:
    qubit, magnet = "[[qubit]]\ng = 2\nname = 'Q'\n", "[magnet]\nazimuth = '1 deg'\nfield = '1 T'\n"
    shuffled = f"title = 'x'\nformat = 1\n[workload]\ngates = 1\n{qubit}[chip]\nmaterial = 'gaas'\n{magnet}"
    text = house_form(read(shuffled, "").plan)
    assert [line for line in text.splitlines() if line] == [
        "format = 1", 'title = "x"', "[magnet]", 'field = "1 T"', 'azimuth = "1 deg"', "[chip]", 'material = "gaas"',
        "[workload]", "gates = 1", "[[qubit]]", 'name = "Q"', 'g = "2"',
    ]  # fmt: skip


# -- keys that no given has


def test_unknown_keys_are_refused_by_check_and_kept_by_the_editor() -> None:
    text = TYPED.replace("gates = 100", "gates = 100\nflux = 3  # of another program") + "[extra]\nx = 1\n"
    with pytest.raises(PlanError) as caught:
        read(text, "plan.toml")
    assert caught.value.sentences == [
        "plan.toml:15: workload.flux: is not a given: see 'planner words workload'",
        "plan.toml:28: extra: is not a given: see 'planner words'",
    ]
    document = read(text, "plan.toml", keep_unknown=True)
    assert document.ignored == tuple(f"{each}; the line is kept and does not count" for each in caught.value.sentences)
    plan = edited(document.plan, Address("workload", None, "gates"), "5")
    assert differences(text, patched(document, plan)) == ["-gates = 100", "+gates = 5"]


def test_the_editor_does_not_keep_what_is_wrong() -> None:
    with pytest.raises(PlanError, match=r"magnet\.field: 'x' does not read"):
        read(TYPED.replace('"500 mT"', '"x"').replace("gates = 100", "gates = 100\nflux = 3"), "", keep_unknown=True)


# -- on disk


@pytest.fixture
def path(tmp_path: Path) -> Path:
    path = tmp_path / "plan.toml"
    path.write_bytes(TYPED.encode())
    return path


def with_field(document: Document, text: str) -> Plan:
    return edited(document.plan, Address("magnet", None, "field"), text)


def test_saving_returns_the_document_as_it_then_is(path: Path) -> None:
    first = load(path)
    saved = save(first, with_field(first, "1 T"), path)
    assert path.read_bytes() == TYPED.replace('"500 mT"', '"1 T"').encode()
    assert saved == load(path)
    again = save(saved, first.plan, path)
    assert path.read_bytes() == TYPED.encode()
    assert again == first


def test_a_file_that_someone_else_changed_is_not_overwritten(path: Path) -> None:
    document = load(path)
    path.write_bytes(path.read_bytes() + b"# mine\n")
    for plan in (document.plan, with_field(document, "1 T")):
        with pytest.raises(ChangedOnDisk, match="is not the file that was loaded"):
            save(document, plan, path)
    assert path.read_bytes() == TYPED.encode() + b"# mine\n"
    saved = save(document, with_field(document, "1 T"), path, overwrite=True)
    assert path.read_bytes() == TYPED.replace('"500 mT"', '"1 T"').encode()
    save(saved, document.plan, path)


def test_a_file_that_has_gone_is_not_made_anew_unasked(path: Path) -> None:
    document = load(path)
    path.unlink()
    with pytest.raises(ChangedOnDisk):
        save(document, document.plan, path)
    save(document, document.plan, path, overwrite=True)
    assert path.read_bytes() == TYPED.encode()


def test_another_name_is_saved_to_unless_it_exists(path: Path) -> None:
    document, other = load(path), path.with_name("other.toml")
    saved = save(document, with_field(document, "1 T"), other)
    assert (saved.path, saved.plan.magnet.field) == (other, with_field(document, "1 T").magnet.field)
    assert path.read_bytes() == TYPED.encode()
    assert other.read_bytes() == TYPED.replace('"500 mT"', '"1 T"').encode()
    with pytest.raises(ChangedOnDisk, match=r"other\.toml exists already"):
        save(document, document.plan, other)
    save(saved, document.plan, other)


def test_what_can_not_be_saved_leaves_everything_as_it_was(path: Path) -> None:
    document = load(path)
    with pytest.raises(SaveError, match="its folder does not exist"):
        save(document, document.plan, path.parent / "no" / "plan.toml")
    with pytest.raises(ReadError, match="is a folder"):
        save(document, document.plan, path.parent)
    assert [each.name for each in path.parent.iterdir()] == ["plan.toml"]
    assert path.read_bytes() == TYPED.encode()


def test_a_file_that_changes_while_it_is_read_is_noticed_when_saving(
    path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    real = planfile.durable.read_text

    def read_and_change(which: Path, limit: int) -> str:
        text = real(which, limit)
        which.write_text(text + "# someone else\n", encoding="utf-8")
        return text

    monkeypatch.setattr(planfile.durable, "read_text", read_and_change)
    document = load(path)
    with pytest.raises(ChangedOnDisk, match="is not the file that was loaded"):
        save(document, document.plan, path)


# -- properties: any text that is a plan, any edits that are accepted


BLANKS = ("", " ", "\t", "   ")
NOTES = ("", "# note", "#", '# "quoted" [x] = {1}', "# ± µ 温")
LINES_BETWEEN = ("", "   ", "# a line", "\t# [not.a.table]", "# key = 'value'")


def between(chance: Random) -> list[str]:
    return chance.sample(LINES_BETWEEN, chance.choice((0, 0, 1, 2)))


def typed_line(chance: Random, key: str, value: str) -> str:
    """A line as people may type it: key and value with any blanks, quotes and comment."""
    name = chance.choice((key, f'"{key}"', f"'{key}'"))
    shown = value if value.replace(".", "").isdigit() else chance.choice((f'"{value}"', f"'{value}'"))
    parts = (name, "=", shown, chance.choice(NOTES))
    return "".join(chance.choice(BLANKS) + part for part in parts)


HEADS: dict[str, tuple[dict[str, str], dict[str, str]]] = {  # what a table must hold and what it may hold
    "": ({"format": "1"}, {"title": "six [of] = em", "cooldown": "14", "passed": "closing", "wanted_margin": "1.5"}),
    "[magnet]": ({"field": "500 ± 2 mT; measured, # 5"}, {"mode": "driven", "azimuth": "51 deg",
        "noise_driven": "1, 2, 3 uT"}),
    "[chip]": ({"material": "si-sige-natural"}, {"electron_temperature": "95 mK", "drive_leak": "0.5"}),
    "[workload]": ({"gates": "100"}, {"readout": "energy", "longest_wait": "1.5 us"}),
    "[all_qubits]": ({}, {"rabi_frequency": "2 MHz", "t1": "5 ms"}),
    "[[qubit]]": ({"name": "Q1", "g": "2.0"}, {"note": "left", "t2_star": "8.1 ± 0.6 us"}),
    "[[qubit]] ": ({"name": "Q2", "g": "0.28, 0.44, 11.8"}, {"role": "spare", "local_field": "1, 0, 0 mT"}),
    "[[stage]]": ({"name": "still"}, {"temperature": "0.85 K"}),
}  # fmt: skip


def text_by(seed: int) -> str:
    """A plan file with any order of tables and keys, any comments and spacing, either line end or none at the end."""
    chance = Random(seed)
    lines: list[str] = []
    for head in ["", *chance.sample([head for head in HEADS if head], len(HEADS) - 1)]:
        required, optional = HEADS[head]
        if head:
            start = chance.choice(BLANKS) + head.strip() + chance.choice(BLANKS) + chance.choice(NOTES)
            lines += [*between(chance), start]
        for key in chance.sample(list(values := {**required, **_some(chance, optional)}), len(values)):
            lines += [*between(chance), typed_line(chance, key, values[key])]
    return chance.choice(("\n", "\r\n")).join([*lines, *chance.choice(([], [""], ["# end"]))])


def _some(chance: Random, values: dict[str, str]) -> dict[str, str]:
    return {key: value for key, value in values.items() if chance.random() < 0.5}


def texts() -> st.SearchStrategy[str]:
    """Drawn by one number, since drawing each blank takes longer than the tests."""
    return st.integers(0, 2**32).map(text_by)


@given(text=texts())
@settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
def test_loading_and_saving_without_an_edit_gives_the_same_bytes(text: str, tmp_path: Path) -> None:
    path, other = tmp_path / "plan.toml", tmp_path / "other.toml"
    path.write_bytes(text.encode())
    document = load(path)
    save(document, document.plan, path)
    save(document, document.plan, other, overwrite=True)
    assert path.read_bytes() == other.read_bytes() == text.encode()


@given(text=texts())
@settings(max_examples=40, deadline=None)
def test_an_edit_taken_back_by_another_gives_the_same_text(text: str) -> None:
    document = read(text, "")
    longer = patched(document, with_field(document, "1 T"))
    assert patched(read(longer, ""), document.plan).replace('"', "'") == text.replace('"', "'")


@pytest.mark.parametrize("path", PLANS, ids=lambda path: path.stem)
def test_the_demo_plans_are_in_house_form_but_for_their_comments(path: Path) -> None:
    text = path.read_bytes().decode()
    document = read(text, path.name)
    assert text_of(document, document.plan) == (text, False)
    assert read(house_form(document.plan), path.name).plan == document.plan


TEXTS = [
    "", "0", "7", "0.5", "1e3", "2.5 ± 0.1; measured", "350 mT", "1.2 T ± 1 %", "3, 0, 8 mT", "51 deg", "20, 1, 0 deg",
        "5 ppm/h",
    "12 GHz", "2 MHz; estimate", "1.5 us", "20 min", "95 mK", "142 ueV", "800 ppm", "5 %", "-40 dB", "10 dBm",
        "persistent", "energy",
    "spare", "dead", "closing", "si-sige-800ppm", "2027-02-01", "left 'gate'", 'a "note" # no comment', "Q7", "still",
        "温 ± µ",
]  # fmt: skip


@given(text=texts(), picks=st.lists(st.tuples(st.integers(0, 500), st.sampled_from(TEXTS)), min_size=1, max_size=8))
@settings(max_examples=120, deadline=None)
def test_random_edits_change_their_own_lines_and_nothing_else(text: str, picks: Sequence[tuple[int, str]]) -> None:
    document = read(text, "")
    plan = document.plan
    for pick, typed in picks:
        places = list(addresses(plan))
        try:
            plan = edited(plan, places[pick % len(places)], typed, assume="")
        except GivenError:
            continue
    touched = [address for address in addresses(plan) if stated(plan, address) != stated(document.plan, address)]
    assume(touched)
    after = patched(document, plan)
    names = {address.field for address in touched}
    headers = {f"[{address.table}]" for address in touched}
    for line in differences(text.replace("\r\n", "\n"), after.replace("\r\n", "\n")):
        key = line[1:].split("=")[0].strip(" \t\"'")
        assert key in names or (line.startswith("+") and (not key or key in headers)), line
    kept = [address for address in addresses(document.plan) if address not in touched]
    assert all(stated(plan, address) == stated(document.plan, address) for address in kept)


@given(
    text=texts(),
    names=st.lists(st.sampled_from(["Q1", "Q2", "Q3", "left", "温"]), min_size=1, max_size=4, unique=True),
)
@settings(max_examples=60, deadline=None)
def test_any_rows_are_written_without_touching_the_others(text: str, names: Sequence[str]) -> None:
    document = read(text, "")
    by_name = {each.name: each for each in document.plan.qubit}
    rows = tuple(by_name.get(name, row(name)) for name in names)
    plan = with_rows(document.plan, "qubit", rows)
    assume(not problems(plan))
    after, in_house_form = text_of(document, plan)
    assert not in_house_form
    assert read(after, "").plan == plan
    if all(name in by_name for name in names) and list(names) == [name for name in by_name if name in names]:
        assert not [line for line in differences(text, after) if line.startswith("+")]


@given(st.binary(max_size=60))
@settings(max_examples=200, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
def test_any_bytes_are_a_plan_or_refused_in_sentences(tmp_path: Path, content: bytes) -> None:
    path = tmp_path / "plan.toml"
    path.write_bytes(content)
    with pytest.raises(PlanError) as caught:  # sixty bytes are too few for a plan
        load(path)
    assert all(sentence.isprintable() for sentence in caught.value.sentences)


@given(text=texts(), place=st.integers(0, 600), piece=st.text(max_size=3))
@settings(max_examples=150, deadline=None)
def test_a_slip_of_the_pen_is_read_or_refused_in_sentences(text: str, place: int, piece: str) -> None:
    spoilt = text[:place] + piece + text[place + 1 :]
    try:
        document = read(spoilt, "plan.toml", keep_unknown=True)
    except PlanError as error:
        assert error.sentences
        assert all(sentence.isprintable() for sentence in error.sentences)
    else:
        assert problems(document.plan) == []
        assert read(house_form(document.plan), "plan.toml").plan == document.plan
