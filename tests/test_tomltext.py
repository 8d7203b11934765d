"""Edits of a TOML text: what changes, what stays byte for byte, what is refused. The oracle for values is `tomllib`."""

from __future__ import annotations

import copy
import tomllib
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from planner.tomltext import CannotPatch, Change, Edit, InsertRow, Path, RemoveRow, locate, patch, write

ANY_SPEED = settings(deadline=None)

ORDER = {
    "": ["format", "", "device", "title"],
    "magnet": ["field", "mode", "", "rating"],
    "clock": ["aging"],
    "qubit": ["name", "role", "", "g", "note"],
    "pair": ["name", "exchange"],
    "<tables>": ["magnet", "clock", "qubit", "pair"],
}

PLAN = """\
# The device on the red plate
format = 1
device = "D7"   # second of the wafer

[magnet]
  field   =  "250 mT"\t# set magnitude
# driven while we look for the field
mode = 'driven'

# clocks
[clock]

# left half
[[qubit]]
name = "Q1"
g = 2
# still good

# right half
[[qubit]]
name = "Q2"
g = [2.0, 2.0, 1.9]
"""


def changed(*edits: Edit, text: str = PLAN) -> str:
    return patch(text, edits, ORDER)


# Single edits, spelled out


def test_a_changed_value_takes_only_the_place_of_the_old_one() -> None:
    expected = PLAN.replace('  field   =  "250 mT"\t# set', '  field   =  "300 mT"\t# set')
    assert changed(Change(("magnet", "field"), "300 mT")) == expected


def test_a_list_on_one_line_can_be_replaced() -> None:
    assert changed(Change(("qubit", 1, "g"), 2.5)) == PLAN.replace("[2.0, 2.0, 1.9]", "2.5")


def test_quotes_at_the_end_of_a_value_belong_to_it() -> None:
    text = "\n".join(['a = """q""""" # "', "b = '''q''''' # '", r'c = "\"#" # "'])
    edits = [Change((key,), 1) for key in "abc"]
    assert changed(*edits, text=text) == "\n".join(['a = 1 # "', "b = 1 # '", 'c = 1 # "'])


def test_a_removed_key_takes_its_line_along() -> None:
    assert changed(Change(("device",), None)) == PLAN.replace('device = "D7"   # second of the wafer\n', "")
    assert changed(Change(("title",), None), Change(("pair", "name"), None)) == PLAN


def test_new_keys_go_where_the_order_puts_them() -> None:
    edits = [Change(("qubit", 0, "note"), "n"), Change(("qubit", 0, "role"), "use"), Change(("title",), "T")]
    expected = PLAN.replace('"Q1"\ng = 2\n', '"Q1"\nrole = "use"\ng = 2\nnote = "n"\n')
    assert changed(*edits) == expected.replace("of the wafer\n", 'of the wafer\ntitle = "T"\n')


def test_a_key_without_a_predecessor_goes_below_its_header_and_an_unknown_one_last() -> None:
    text = PLAN.replace('name = "Q2"\n', "")
    edits = [Change(("clock", "aging"), "1"), Change(("qubit", 1, "name"), "Q3"), Change(("magnet", "x y"), 1)]
    expected = text.replace("[clock]\n", '[clock]\naging = "1"\n').replace("'driven'\n", "'driven'\n\"x y\" = 1\n")
    assert changed(*edits, text=text) == expected.replace("[[qubit]]\ng = [", '[[qubit]]\nname = "Q3"\ng = [')


def test_a_new_key_is_indented_like_the_key_above_it() -> None:
    text = "[magnet]\n  field = 1\n"
    assert changed(Change(("magnet", "mode"), "driven"), text=text) == text + '  mode = "driven"\n'


def test_a_new_key_stands_next_to_a_removed_one() -> None:
    edits = [Change(("magnet", "mode"), None), Change(("magnet", "rating"), "1 T")]
    assert changed(*edits) == PLAN.replace("mode = 'driven'\n", 'rating = "1 T"\n')


def test_a_new_table_goes_behind_its_predecessor_and_leaves_comments_where_they_belong() -> None:
    text = PLAN.replace("# clocks\n[clock]\n\n", "# rows\n\n")
    expected = text.replace("'driven'\n", "'driven'\n\n[clock]\naging = 1\n")
    assert changed(Change(("clock", "aging"), 1), text=text) == expected


def test_comments_that_touch_the_next_header_stay_with_it() -> None:
    text = "format = 1\n# about the clocks\n[clock]\n"
    expected = "format = 1\n\n[magnet]\nfield = 2\n# about the clocks\n[clock]\n"
    assert changed(Change(("magnet", "field"), 2), text=text) == expected


def test_new_tables_in_an_unknown_and_a_known_place() -> None:
    edits: list[Edit] = [Change(("future", "key"), 1), InsertRow("pair", 0, {"exchange": "1 MHz", "name": "P1"})]
    expected = PLAN + '\n[[pair]]\nname = "P1"\nexchange = "1 MHz"\n\n[future]\nkey = 1\n'
    assert changed(*edits) == expected


ROW = '[[qubit]]\nname = "N"\n\ng = 3\n'


@pytest.mark.parametrize(
    ("index", "above"), [(0, "[clock]\n"), (1, "# still good\n"), (2, "g = [2.0, 2.0, 1.9]\n")], ids=str
)
def test_a_row_is_inserted_behind_the_one_above_and_before_the_comments_of_the_next(index: int, above: str) -> None:
    expected = PLAN.replace(above, f"{above}\n{ROW}")
    assert changed(InsertRow("qubit", index, {"g": 3, "name": "N"})) == expected


def test_rows_inserted_at_one_index_keep_the_order_of_the_edits() -> None:
    rows: list[Edit] = [InsertRow("qubit", 1, {"name": name}) for name in "ba"]
    names = [row["name"] for row in tomllib.loads(changed(*rows))["qubit"]]
    assert names == ["Q1", "b", "a", "Q2"]


def test_a_removed_row_leaves_the_comments_set_off_from_it() -> None:
    assert changed(RemoveRow("qubit", 0)) == PLAN.replace('[[qubit]]\nname = "Q1"\ng = 2\n# still good\n', "")
    assert changed(RemoveRow("qubit", 1)) == PLAN.replace('[[qubit]]\nname = "Q2"\ng = [2.0, 2.0, 1.9]\n', "")


def test_line_ends_and_a_missing_final_newline_stay() -> None:
    text = PLAN.removesuffix("\n").replace("\n", "\r\n")
    edits = [Change(("magnet", "field"), 1), Change(("magnet", "rating"), 2), Change(("qubit", 1, "g"), 3)]
    assert patch(text, edits, ORDER) == changed(*edits).removesuffix("\n").replace("\n", "\r\n")
    appended = changed(InsertRow("qubit", 2, {"name": "N"}), Change(("qubit", 1, "note"), "n"), text=text)
    assert appended == text + '\r\nnote = "n"\r\n\r\n[[qubit]]\r\nname = "N"\r\n'
    assert changed(Change(("b",), None), text="a = 1\nb = 2") == "a = 1\n"


REFUSED: list[tuple[str, Edit, str]] = [
    ("magnet.field = 1", Change(("magnet", "field"), 2), "line 1: magnet.field has no line of its own"),
    ("magnet.field = 1", Change(("magnet", "mode"), "x"), "line 1: magnet has no header [magnet]"),
    ("x = 1\nmagnet = {field = 1}", Change(("magnet", "field"), 2), "line 2: magnet.field has no line of its own"),
    ("magnet = {}", Change(("magnet", "field"), 2), "line 1: magnet has no header [magnet]"),
    ("magnet = {}", Change(("magnet",), 2), "line 1: magnet is an inline table"),
    ("[magnet]", Change(("magnet",), 2), "line 1: magnet has no line of its own"),
    ('a = """\nx"""', Change(("a",), "y"), "line 1: a is a value of several lines"),
    ('a = """\nx"""', Change(("a",), None), "line 1: a is a value of several lines"),
    ("qubit = [\n{g = 1}]", Change(("qubit", 0, "g"), 2), "line 2: qubit.0.g has no line of its own"),
    ("qubit = [{g = 1}]", Change(("qubit", 0, "name"), "Q"), "there is no [[qubit]] block for the row qubit.0"),
    ("qubit = []", InsertRow("qubit", 0, {}), "line 1: qubit is not a plain list of [[qubit]] blocks"),
    ("[qubit]", InsertRow("qubit", 0, {}), "line 1: qubit is not a plain list of [[qubit]] blocks"),
    ("[[qubit]]\n[qubit.more]", RemoveRow("qubit", 0), "line 1: qubit is not a plain list of [[qubit]] blocks"),
    ("[[qubit]]", RemoveRow("qubit", 1), "there is no [[qubit]] block for the row qubit.1"),
    ("[[qubit]]", RemoveRow("qubit", -1), "there is no [[qubit]] block for the row qubit.-1"),
    ("[[qubit]]", InsertRow("qubit", 2, {}), "there is no [[qubit]] block for the row qubit.2"),
    ("[a.b]\nc = 1", Change(("a", "b", "c"), 2), "a.b.c is not a key of the top level, of a table or of a row"),
]


@pytest.mark.parametrize(("text", "edit", "message"), REFUSED)
def test_what_cannot_be_changed_alone_is_refused(text: str, edit: Edit, message: str) -> None:
    with pytest.raises(CannotPatch) as caught:
        changed(edit, text=text)
    assert str(caught.value).startswith(message)


@pytest.mark.parametrize(
    "edits",
    [
        [Change(("qubit", 0, "g"), 1), RemoveRow("qubit", 0)],
        [Change(("qubit", 1, "note"), "behind its last line"), RemoveRow("qubit", 1)],
        [Change(("format",), 1), Change(("format",), 2)],
        [RemoveRow("qubit", 0), RemoveRow("qubit", 0)],
    ],
)
def test_edits_that_contradict_each_other_are_refused(edits: list[Edit]) -> None:
    with pytest.raises(CannotPatch):
        changed(*edits)


# Where keys stand

WILD = '''\
a.b = 1
t = """
[not.a.table]
no = 1 # text""" # "
l = [ # [x]
  {x = 1, "y z".w = [{}, 2]},

  {x = ']'},
]
[c . "d.e"]
f = """"two" \\""""
[[r]]
[r.s]
k = 1
[[r.u]]
[[r]]
[[r.u]]
v = 0
[c]'''


def test_every_key_of_a_hostile_text_is_found() -> None:
    expected: dict[Path, int] = {
        ("a",): 1, ("a", "b"): 1, ("t",): 2, ("l",): 5, ("l", 0): 6, ("l", 0, "x"): 6, ("l", 0, "y z"): 6,
        ("l", 0, "y z", "w"): 6, ("l", 0, "y z", "w", 0): 6, ("l", 1): 8, ("l", 1, "x"): 8, ("c",): 19,
        ("c", "d.e"): 10, ("c", "d.e", "f"): 11, ("r",): 12, ("r", 0): 12, ("r", 0, "s"): 13, ("r", 0, "s", "k"): 14,
        ("r", 0, "u"): 15, ("r", 0, "u", 0): 15, ("r", 1): 16, ("r", 1, "u"): 17, ("r", 1, "u", 0): 17,
        ("r", 1, "u", 0, "v"): 18,
    }  # fmt: skip
    assert locate(WILD) == locate(WILD.replace("\n", "\r\n")) == expected


# Rules, over generated texts

COMMENTS = ["#", "# [clock]", '# field = "1 T"', "  # it's", "#\t'''", '# """', "", "   "]
VALUES = ["1", "-0.0", "1e-11", "true", "1979-05-27T07:32:00Z", '"250 mT"', "'#'", '"= [x"', '""', "''", '"\\" \\\\"']
VALUES += ['"""a # "" b"""', "'''x'''", '""""q" """', '[1, "]", 2]', "[[], ['#']]"]
WILD_VALUES = ["{}", "{a.b = 1, c = '}'}", "[{g = 1}, {}]", '"""\n[[qubit]]\n"""', "'''\nname = 1 # '''"]
WILD_VALUES += ["[ # ]\n 1,\n]", "[\n{a = [\n{}]}]"]
KEYS = ["format", "device", "title", "name", "g", "note", "field", "mode", "x y", "", "a.b", "=#", "\u00b5"]


def spelled(key: str, value: str, marks: tuple[str, str, str, str]) -> str:
    indent, before, after, comment = marks
    bare = key.isascii() and key.isalnum()
    return f"{indent}{key if bare else repr(key)}{before}={after}{value}{comment}"


MARKS = st.tuples(*map(st.sampled_from, (["", "  ", "\t"], ["", " ", "\t"], ["", " ", "  "], ["", " # x = 1", "\t#"])))


@dataclass(frozen=True, slots=True, kw_only=True)
class Generated:
    """A text and the line on which each of its headers and keys was put."""

    text: str
    headers: dict[Path, int]
    keys: dict[Path, int]


@st.composite
def texts(draw: st.DrawFn, *, wild: bool = False) -> Generated:
    """Only wild texts hold what can't be patched."""
    lines: list[str] = []
    headers: dict[Path, int] = {}
    keys: dict[Path, int] = {}
    values = VALUES + WILD_VALUES * wild

    def put(line: str, path: Path, places: dict[Path, int]) -> None:
        lines.extend(draw(st.lists(st.sampled_from(COMMENTS), max_size=2)))
        places[path] = 1 + sum(each.count("\n") + 1 for each in lines)
        lines.append(line)

    def fill(path: Path) -> None:
        for key in draw(st.lists(st.sampled_from(KEYS[path == () :]), unique=True, max_size=4)):
            put(spelled(key, draw(st.sampled_from(values)), draw(MARKS)), (*path, key), keys)
        if wild and draw(st.booleans()):
            put("dotted . key = 1", (*path, "dotted", "key"), keys)

    def open_table(path: Path, header: str) -> None:
        put(header, path, headers)
        fill(path)

    put("format = 1", ("format",), keys)
    fill(())
    rows = {"qubit": 0, "pair": 0}
    for name in draw(st.lists(st.sampled_from(["magnet", "clock", "other", *["qubit", "pair"] * 3]), max_size=7)):
        if name in rows:
            open_table((name, rows[name]), f"[[{name}]]")
            if wild and draw(st.integers(0, 3)) == 0:
                open_table((name, rows[name], "sub"), f"[{name}.sub]")
            rows[name] += 1
        elif (name,) not in headers:
            open_table((name,), f"[{name}] # table")
    lines.extend(draw(st.lists(st.sampled_from(COMMENTS), max_size=2)))
    newline = draw(st.sampled_from(["\n", "\r\n"]))
    final = "\n" * draw(st.booleans())
    return Generated(text=("\n".join(lines) + final).replace("\n", newline), headers=headers, keys=keys)


SCALARS = st.one_of(st.text(max_size=5), st.integers(-9, 9), st.floats(allow_nan=False), st.booleans())


@st.composite
def edits_of(draw: st.DrawFn, document: dict[str, object]) -> list[Edit]:
    """Edits that don't contradict each other, of tables and rows that are there or can be added."""
    rows = {name: len(value) for name in ("qubit", "pair") if isinstance(value := document.get(name, []), list)}
    removed = {(name, row) for name in rows for row in range(rows[name]) if draw(st.integers(0, 3)) == 0}
    homes: list[Path] = [(), ("magnet",), ("clock",), ("other",), ("new",)]
    homes += [(name, row) for name in rows for row in range(rows[name]) if (name, row) not in removed]
    paths = draw(st.lists(st.tuples(st.sampled_from(homes), st.sampled_from(KEYS)), unique=True, max_size=8))
    edits: list[Edit] = [Change((*home, key), draw(st.none() | SCALARS)) for home, key in paths]
    edits += [RemoveRow(*each) for each in removed]
    values = st.dictionaries(st.sampled_from(KEYS), SCALARS, max_size=4)
    for name in draw(st.lists(st.sampled_from(sorted(rows)), max_size=3)):
        edits.append(InsertRow(name, draw(st.integers(0, rows[name])), draw(values)))
    return draw(st.permutations(edits))


def applied(document: dict[str, object], edits: Sequence[Edit]) -> dict[str, object]:
    result = copy.deepcopy(document)
    for edit in edits:
        if isinstance(edit, Change) and edit.value is not None:
            parent(result, edit.path)[edit.path[-1]] = edit.value
        elif isinstance(edit, Change) and edit.path[0] in result:
            parent(result, edit.path).pop(edit.path[-1], None)
    for array in {edit.array for edit in edits if not isinstance(edit, Change)}:
        old = result.pop(array, [])
        assert isinstance(old, list)
        new = [row for index in range(len(old) + 1) for row in rows_at(old, index, array, edits)]
        result |= {array: new} if new else {}
    return result


def parent(document: dict[str, object], path: Path) -> dict[str | int, object]:
    node: object = document
    for name in path[:-1]:
        node = node.setdefault(name, {}) if isinstance(node, dict) else node[name]  # type: ignore[index]
    assert isinstance(node, dict)
    return node


def rows_at(old: list[object], index: int, array: str, edits: Sequence[Edit]) -> Iterator[object]:
    for edit in edits:
        if isinstance(edit, InsertRow) and (edit.array, edit.index) == (array, index):
            yield dict(edit.values)
    if index < len(old) and RemoveRow(array, index) not in edits:
        yield old[index]


def typed(value: object) -> object:
    """Tells apart what Python holds equal: 1, 1.0 and true, 0.0 and -0.0."""
    if isinstance(value, dict):
        return {key: typed(inner) for key, inner in value.items()}
    return [typed(inner) for inner in value] if isinstance(value, list) else (type(value).__name__, repr(value))


def paths(value: object, path: Path = ()) -> Iterator[Path]:
    items = value.items() if isinstance(value, dict) else enumerate(value) if isinstance(value, list) else ()
    for name, inner in items:
        if isinstance(name, str) or isinstance(inner, (dict, list)):
            yield (*path, name)
        yield from paths(inner, (*path, name))


@ANY_SPEED
@given(texts(wild=True))
def test_locate_finds_what_tomllib_reads_and_where_it_was_put(generated: Generated) -> None:
    found = locate(generated.text)
    placed = generated.headers | generated.keys
    assert set(found) == set(paths(tomllib.loads(generated.text)))
    assert {path: found[path] for path in placed} == placed


@ANY_SPEED
@given(texts(wild=True))
def test_no_edits_change_nothing(generated: Generated) -> None:
    assert patch(generated.text, [], ORDER) == generated.text


@ANY_SPEED
@given(st.data(), texts())
def test_a_patched_text_reads_as_the_edited_document(data: st.DataObject, generated: Generated) -> None:
    document = tomllib.loads(generated.text)
    edits = data.draw(edits_of(document))
    assert typed(tomllib.loads(patch(generated.text, edits, ORDER))) == typed(applied(document, edits))


@ANY_SPEED
@given(st.data(), texts(wild=True))
def test_any_text_is_patched_rightly_or_not_at_all(data: st.DataObject, generated: Generated) -> None:
    document = tomllib.loads(generated.text)
    edits = data.draw(edits_of(document))
    try:
        patched = patch(generated.text, edits, ORDER)
    except CannotPatch:
        return
    assert typed(tomllib.loads(patched)) == typed(applied(document, edits))


@ANY_SPEED
@given(st.data(), texts())
def test_lines_that_no_edit_names_stay_in_their_order(data: st.DataObject, generated: Generated) -> None:
    edits = data.draw(edits_of(tomllib.loads(generated.text)))
    edits = [each for each in edits if not isinstance(each, RemoveRow)]
    named = {generated.keys.get(edit.path) for edit in edits if isinstance(edit, Change)}
    patched = iter(patch(generated.text, edits, ORDER).split("\n"))
    for number, line in enumerate(generated.text.split("\n"), start=1):
        assert number in named or any(line.rstrip("\r") == each.rstrip("\r") for each in patched), line


@ANY_SPEED
@given(st.data(), texts())
def test_a_changed_value_leaves_the_rest_of_its_line_and_all_others(data: st.DataObject, generated: Generated) -> None:
    path = data.draw(st.sampled_from(sorted(generated.keys, key=repr)))
    before, after = generated.text.split("\n"), patch(generated.text, [Change(path, "NEW")], ORDER).split("\n")
    number = generated.keys[path] - 1
    assert after[:number] + after[number + 1 :] == before[:number] + before[number + 1 :]
    start, end = after[number].split('"NEW"')
    assert before[number].startswith(start) and before[number].endswith(end)
    assert start.endswith(("=", "= ", "=  ")) and end.rstrip("\r") in ("", " # x = 1", "\t#")


@ANY_SPEED
@given(st.data(), texts(), st.dictionaries(st.sampled_from(KEYS), SCALARS, max_size=4))
def test_removing_an_inserted_row_gives_the_old_text_back(
    data: st.DataObject, generated: Generated, values: dict[str, str | int | float]
) -> None:
    text = generated.text.rstrip("\r\n") + ("\r\n" if "\r\n" in generated.text else "\n")
    index = data.draw(st.integers(0, len(tomllib.loads(text).get("qubit", []))))
    longer = patch(text, [InsertRow("qubit", index, values)], ORDER)
    assert patch(longer, [RemoveRow("qubit", index)], ORDER) == text


# New files


def test_house_form() -> None:
    document = {
        "qubit": [{"g": 2.0, "name": "Q1", "x": [1, {"y": ()}]}, {"name": "Q2"}],
        "own": {}, "device": 'two\n"lines"', "magnet": {"rating": "1 T", "field": "1 mT"}, "format": 1, "empty": [],
    }  # fmt: skip
    assert write(document, ORDER) == (
        'format = 1\n\ndevice = "two\\n\\"lines\\""\n\nempty = []\n\n'
        '[magnet]\nfield = "1 mT"\n\nrating = "1 T"\n\n'
        '[[qubit]]\nname = "Q1"\n\ng = 2.0\n\nx = [1, {y = []}]\n\n[[qubit]]\nname = "Q2"\n\n'
        "[own]\n"
    )
    assert write({}, ORDER) == ""


NAMES = st.text(max_size=3) | st.sampled_from(KEYS + ORDER["<tables>"])
ANY = st.recursive(
    SCALARS | st.dates(), lambda inner: st.lists(inner, max_size=3) | st.dictionaries(NAMES, inner), max_leaves=8
)


@ANY_SPEED
@given(st.dictionaries(NAMES, ANY, max_size=6))
def test_a_written_document_reads_the_same(document: dict[str, object]) -> None:
    assert typed(tomllib.loads(write(document, ORDER))) == typed(document)


@ANY_SPEED
@given(st.data(), texts())
def test_what_was_written_can_be_patched(data: st.DataObject, generated: Generated) -> None:
    document = tomllib.loads(generated.text)
    edits = data.draw(edits_of(document))
    assert typed(tomllib.loads(patch(write(document, ORDER), edits, ORDER))) == typed(applied(document, edits))
