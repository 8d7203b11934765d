"""Edits of a TOML text that leave every other line as it was typed.

Pure functions on text: no files, no plan. `tomllib` reads every key and header; the scanner below only finds where a
logical line begins and ends. Rows are `[[array]]` tables, counted in the order of the text.

The caller parses a patched text again and compares. In doubt `patch` raises `CannotPatch` and leaves the choice to it.
"""

from __future__ import annotations

import re
import sys
import tomllib
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from itertools import chain
from typing import Literal

import tomli_w

Path = tuple[str | int, ...]
"""Names of tables and keys from the top down; an int counts the rows of an array, from 0."""

Order = Mapping[str, Sequence[str]]
"""The keys of each table in house order ('' is the top level), `'<tables>'` the tables; '' among keys parts groups."""

Scalar = str | int | float

_TOKEN = re.compile(
    r'"""(?:\\.|[^\\])*?"""(?:"{0,2})'
    r"|'''.*?'''(?:'{0,2})"
    r'|"(?:\\[^\n]|[^"\\\n])*"'
    r"|'[^'\n]*'"
    r"|#[^\n]*"
    r"""|[^"'#\[\]{}=,\n]+"""
    r"|.",
    re.DOTALL,
)
_SPACE = " \t\r\n"


class CannotPatch(ValueError):
    """The text is written such that the edit can't be made by changing lines alone; the message says where."""


@dataclass(frozen=True, slots=True)
class Change:
    """A key set to a value, or removed with its line (None). Rows are counted in the text before any edit."""

    path: Path
    value: Scalar | None


@dataclass(frozen=True, slots=True)
class InsertRow:
    """A new `[[array]]` block before the row now at `index`; at the number of rows, behind the last."""

    array: str
    index: int
    values: Mapping[str, Scalar]


@dataclass(frozen=True, slots=True)
class RemoveRow:
    """A row's header, keys and the comments among them go. Comments above the header, or set off behind it, stay."""

    array: str
    index: int


Edit = Change | InsertRow | RemoveRow


@dataclass(frozen=True, slots=True)
class _Line:
    """A logical line: its value may run over several lines of the text."""

    kind: Literal["header", "key", "comment", "blank"]
    number: int
    start: int
    stop: int
    path: Path = ()
    dotted: bool = False
    value: tuple[int, int] = (0, 0)
    """Where the value starts and stops in the text."""


@dataclass(frozen=True, slots=True)
class _Block:
    """A header and the lines down to the next one; the first block is the top level and has no header."""

    path: Path
    lines: tuple[_Line, ...]
    tail: int
    """Where the next block can be inserted: behind the last key and the comments attached to it."""


@dataclass(frozen=True, slots=True)
class _Splice:
    start: int
    stop: int
    text: str
    rank: tuple[int, ...] = ()
    """Sorts what is inserted at one place: keys before blocks, each in the order of the house."""


@dataclass(frozen=True, slots=True)
class _Layout:
    text: str
    newline: str
    blocks: tuple[_Block, ...]
    places: Mapping[Path, int]


def locate(text: str) -> dict[Path, int]:
    """The 1-based line of every table, row and key, those inside inline tables too; the text must be valid TOML.

    What is only implied (the `a` of `[a.b]`, an array by its first row) stands where it is first implied.
    """
    return _places(text, _read(text))


def patch(text: str, edits: Sequence[Edit], order: Order) -> str:
    """The text with the edits made and everything else byte for byte.

    A changed value takes only the place of the old one. A new key goes behind the nearest key that precedes it in the
    order, otherwise directly below the header; a new table behind the nearest table, after a blank line.
    """
    _refuse_contradictions(edits)
    newline = "\r\n" if re.match(r"[^\n]*\r\n", text) else "\n"
    unfinished = text != "" and not text.endswith("\n")
    layout = _layout(text + newline if unfinished else text, newline)
    splices = [*_key_splices(layout, edits, order), *_row_splices(layout, edits, order)]
    patched = _spliced(layout.text, splices)
    end_untouched = all(splice.stop < len(layout.text) for splice in splices)
    return patched.removesuffix(newline) if unfinished and end_untouched else patched


def write(document: Mapping[str, object], order: Order) -> str:
    """A whole document in house form: one value a line, tables in order, every row of tables a `[[block]]`."""
    top = {key: value for key, value in document.items() if not _tables_in(value)}
    blocks = ["\n".join(_body(top, order.get("", ()))) + "\n"] if top else []
    known = [name for name in order.get("<tables>", ()) if name in document and name not in top]
    for name in [*known, *(name for name in document if name not in top and name not in known)]:
        row = not isinstance(document[name], Mapping)
        blocks += ["\n".join(_block(name, table, order, row=row)) + "\n" for table in _tables_in(document[name])]
    return "\n".join(blocks)


# Reading: text -> logical lines -> places, blocks


def _read(text: str) -> Iterator[_Line]:
    start, number, table = 0, 1, Path()
    rows: dict[Path, int] = {}
    while start < len(text):
        equals, content, stop = _spans(text, start)
        head = text[start : content if equals is None else equals].strip(_SPACE)
        if not head:
            yield _Line("blank" if text[start:stop].isspace() else "comment", number, start, stop)
        elif equals is None:
            table = _table(_names(head), rows, row=head.startswith("[["))
            yield _Line("header", number, start, stop, table)
        else:
            names = _names(f"{head} = 0")
            yield _Line("key", number, start, stop, (*table, *names), len(names) > 1, _value_at(text, equals, content))
        number += text.count("\n", start, stop)
        start = stop


def _spans(text: str, start: int) -> tuple[int | None, int, int]:
    """Of the logical line at `start`: where its equals sign is, where its content ends, where the next line begins."""
    equals, content, depth = None, None, 0
    for token in _TOKEN.finditer(text, start):
        sign = token.group()
        if depth == 0 and sign == "\n":
            return equals, token.start() if content is None else content, token.end()
        if depth == 0 and sign.startswith("#"):
            content = token.start()
        if depth == 0 and sign == "=" and equals is None:
            equals = token.start()
        depth += (sign in ("[", "{")) - (sign in ("]", "}"))
    return equals, len(text) if content is None else content, len(text)


def _value_at(text: str, equals: int, content: int) -> tuple[int, int]:
    value = text[equals + 1 : content]
    start = equals + 1 + len(value) - len(value.lstrip(_SPACE))
    return start, max(start, equals + 1 + len(value.rstrip(_SPACE)))


def _names(fragment: str) -> tuple[str, ...]:
    """The names that one header, or one key set to 0, spells."""
    names: list[str] = []
    node: object = tomllib.loads(fragment)
    while isinstance(node, dict) and node:
        name, node = next(iter(node.items()))
        names.append(name)
    return tuple(names)


def _table(names: tuple[str, ...], rows: dict[Path, int], *, row: bool) -> Path:
    """The path a header opens: a name of an array means its last row so far; a row's header adds one to `rows`."""
    path: Path = ()
    for depth, name in enumerate(names, start=1):
        path = (*path, name)
        if row and depth == len(names):
            rows[path] = rows.get(path, 0) + 1
        if path in rows:
            path = (*path, rows[path] - 1)
    return path


def _places(text: str, lines: Iterator[_Line] | Sequence[_Line]) -> dict[Path, int]:
    places: dict[Path, int] = {}
    for line in lines:
        for depth in range(1, len(line.path)):
            places.setdefault(line.path[:depth], line.number)
        if line.path:
            places[line.path] = line.number
        for path, number in _inside(text, line):
            places.setdefault(path, number)
    return places


def _inside(text: str, line: _Line) -> Iterator[tuple[Path, int]]:
    """Tables, arrays and keys within the value of a line."""
    path, number, key_start = line.path, line.number, 0
    outer: list[tuple[str, Path]] = []
    for token in _TOKEN.finditer(text, *line.value):
        sign = token.group()
        if sign in ("[", "{"):
            yield path, number
            outer.append((sign, path))
            path = (*path, 0) if sign == "[" else path
        elif sign in ("]", "}"):
            path = outer.pop()[1]
        elif sign == "," and outer[-1][0] == "[":
            path = (*outer[-1][1], int(path[-1]) + 1)
        elif sign == "=":
            depth = len(outer[-1][1])
            path = (*outer[-1][1], *_names(f"{text[key_start : token.start()].strip(_SPACE)} = 0"))
            yield from ((path[:length], number) for length in range(depth + 1, len(path) + 1))
        key_start = token.end() if sign in ("{", ",") else key_start
        number += sign.count("\n")


def _layout(text: str, newline: str) -> _Layout:
    lines = tuple(_read(text))
    heads = [index for index, line in enumerate(lines) if line.kind == "header"]
    ends = [*heads, len(lines)]
    groups = [lines[start:end] for start, end in zip([0, *heads], ends, strict=True)]
    blocks = [
        _Block(group[0].path if number else (), group, _tail(group, last=number == len(heads)))
        for number, group in enumerate(groups)
    ]
    return _Layout(text, newline, tuple(blocks), _places(text, lines))


def _tail(lines: Sequence[_Line], *, last: bool) -> int:
    """Comments directly below the last key belong to the block, unless they run on into the next header."""
    own = max((index for index, line in enumerate(lines) if line.path), default=-1) + 1
    end = own
    while end < len(lines) and lines[end].kind == "comment":
        end += 1
    end = own if end == len(lines) and not last else end
    return lines[end - 1].stop if end else 0


def _dotted(path: Path) -> str:
    return ".".join(str(name) for name in path)


# Patching: edits -> splices -> text


def _refuse_contradictions(edits: Sequence[Edit]) -> None:
    taken: set[Path] = {(edit.array, edit.index) for edit in edits if isinstance(edit, RemoveRow)}
    for path in (edit.path for edit in edits if isinstance(edit, Change)):
        if path in taken or path[:2] in taken:
            raise CannotPatch(f"{_dotted(path)} is edited twice at once")
        taken.add(path)


def _key_splices(layout: _Layout, edits: Sequence[Edit], order: Order) -> Iterator[_Splice]:
    blocks = {block.path: block for block in layout.blocks}
    lines = {line.path: line for block in layout.blocks for line in block.lines if line.kind == "key"}
    new_tables: dict[str, dict[str, Scalar]] = {}
    for path, value in ((edit.path, edit.value) for edit in edits if isinstance(edit, Change)):
        table, key = _table_and_key(path)
        if path in lines and not lines[path].dotted:
            yield _changed(layout, lines[path], value)
        elif path in layout.places:
            raise CannotPatch(f"line {layout.places[path]}: {_dotted(path)} has no line of its own that can be changed")
        elif value is not None and table in blocks:
            yield _new_key(layout, blocks[table], _assignment(key, value), _keys_above(order, table, key))
        elif value is not None:
            new_tables.setdefault(_new_table(layout, table), {})[key] = value
    for name, values in new_tables.items():
        lines_of_table = _block(name, values, order, row=False)
        yield _new_block(layout, lines_of_table, _place_of_table(layout, name, order), _rank(name, order))


def _table_and_key(path: Path) -> tuple[Path, str]:
    match path:
        case (str(key),) | (str(), str(key)) | (str(), int(), str(key)):
            return path[:-1], key
    raise CannotPatch(f"{_dotted(path)} is not a key of the top level, of a table or of a row")


def _changed(layout: _Layout, line: _Line, value: Scalar | None) -> _Splice:
    start, stop = line.value
    old = layout.text[start:stop]
    if "\n" in old or old.startswith("{"):
        kind = "an inline table" if old.startswith("{") else "a value of several lines"
        raise CannotPatch(f"line {line.number}: {_dotted(line.path)} is {kind}, which can't be changed alone")
    if value is None:
        return _Splice(line.start, line.stop, "")
    return _Splice(start, stop, _value(value))


def _keys_above(order: Order, table: Path, key: str) -> list[str] | None:
    """The keys that precede a key in house order; None where the order doesn't know it."""
    keys = [each for each in order.get(str(table[0]) if table else "", ()) if each]
    return keys[: keys.index(key)] if key in keys else None


def _new_key(layout: _Layout, block: _Block, assignment: str, above: Sequence[str] | None) -> _Splice:
    """Behind the nearest key above it, a key that the order doesn't know behind the last one."""
    own = {str(line.path[len(block.path)]): line for line in block.lines if line.kind == "key"}
    nearest = reversed(list(own) if above is None else above)
    anchor = next((own[name] for name in nearest if name in own), block.lines[0] if block.path else None)
    place = anchor.stop if anchor else 0
    indent = _indent(layout.text, anchor.start) if anchor else ""
    rank = sys.maxsize if above is None else len(above)
    return _Splice(place, place, f"{indent}{assignment}{layout.newline}", (0, rank))


def _indent(text: str, start: int) -> str:
    indented = text[start : text.find("\n", start)]
    return indented[: len(indented) - len(indented.lstrip(_SPACE))]


def _new_table(layout: _Layout, table: Path) -> str:
    """The name of a table that can be added, being nowhere yet."""
    name = str(table[0])
    if len(table) > 1:
        raise CannotPatch(f"there is no [[{name}]] block for the row {_dotted(table)}")
    if (name,) in layout.places:
        raise CannotPatch(f"line {layout.places[name,]}: {name} has no header [{name}] to put a key below")
    return name


def _new_block(layout: _Layout, lines: Sequence[str], place: int, rank: int) -> _Splice:
    text = "".join(line + layout.newline for line in lines)
    return _Splice(place, place, layout.newline + text if place else text + layout.newline, (1, rank))


def _rank(name: str, order: Order) -> int:
    tables = order.get("<tables>", ())
    return tables.index(name) if name in tables else len(tables)


def _place_of_table(layout: _Layout, name: str, order: Order) -> int:
    tables = order.get("<tables>", ())
    if name not in tables:
        return layout.blocks[-1].tail
    tails = {block.path[0]: block.tail for block in layout.blocks if block.path}
    above = reversed(tables[: tables.index(name)])
    return next((tails[each] for each in above if each in tails), layout.blocks[0].tail)


def _row_splices(layout: _Layout, edits: Sequence[Edit], order: Order) -> Iterator[_Splice]:
    for edit in edits:
        if isinstance(edit, InsertRow):
            lines = _block(edit.array, edit.values, order, row=True)
            yield _new_block(layout, lines, _place_of_row(layout, edit, order), _rank(edit.array, order))
        elif isinstance(edit, RemoveRow):
            yield _removed_row(layout, edit)


def _rows(layout: _Layout, edit: InsertRow | RemoveRow) -> list[int]:
    """Which blocks are the rows of the array; refused where it is no plain list of rows."""
    array = edit.array
    numbers = [number for number, block in enumerate(layout.blocks) if block.path[:1] == (array,)]
    plain = [layout.blocks[number].path for number in numbers] == [(array, row) for row in range(len(numbers))]
    if not plain or (not numbers and (array,) in layout.places):
        raise CannotPatch(f"line {layout.places[array,]}: {array} is not a plain list of [[{array}]] blocks")
    if not 0 <= edit.index < len(numbers) + isinstance(edit, InsertRow):
        raise CannotPatch(f"there is no [[{array}]] block for the row {array}.{edit.index}")
    return numbers


def _place_of_row(layout: _Layout, edit: InsertRow, order: Order) -> int:
    """Behind the row above, or behind whatever stands above the first row."""
    rows = _rows(layout, edit)
    if not rows:
        return _place_of_table(layout, edit.array, order)
    return layout.blocks[rows[edit.index - 1] if edit.index else rows[0] - 1].tail


def _removed_row(layout: _Layout, edit: RemoveRow) -> _Splice:
    """The row goes with the blank lines above it, so that inserting and removing a row gives the old text back."""
    number = _rows(layout, edit)[edit.index]
    start = layout.blocks[number].lines[0].start
    for line in reversed(layout.blocks[number - 1].lines):
        if line.kind != "blank":
            break
        start = line.start
    return _Splice(start, layout.blocks[number].tail, "")


def _spliced(text: str, splices: Sequence[_Splice]) -> str:
    pieces, done = [], 0
    for splice in sorted(splices, key=lambda each: (each.start, each.stop, each.rank)):
        if splice.start < done:
            raise CannotPatch("two edits meet in one line")
        pieces += [text[done : splice.start], splice.text]
        done = splice.stop
    return "".join([*pieces, text[done:]])


# Writing: values -> lines in house form


def _tables_in(value: object) -> list[Mapping[str, object]]:
    """The tables a top-level value is written as: itself, its rows, or none as it is a plain value."""
    if isinstance(value, Mapping):
        return [value]
    rows = value if isinstance(value, list) else []
    return rows if all(isinstance(row, Mapping) for row in rows) else []


def _block(name: str, values: Mapping[str, object], order: Order, *, row: bool) -> list[str]:
    header = tomli_w.dumps({name: {}}).strip()
    return [f"[{header}]" if row else header, *_body(values, order.get(name, ()))]


def _body(values: Mapping[str, object], keys: Sequence[str]) -> list[str]:
    """Lines in house order, a blank one between groups, the keys that the order doesn't know as the last group."""
    groups: list[list[str]] = [[]]
    for key in keys:
        if not key:
            groups.append([])
        elif key in values:
            groups[-1].append(_assignment(key, values[key]))
    groups.append([_assignment(key, value) for key, value in values.items() if not key or key not in keys])
    return list(chain.from_iterable(["", *group] for group in groups if group))[1:]


def _assignment(key: str, value: object) -> str:
    name = tomli_w.dumps({key: 0}).removesuffix(" = 0\n")
    return f"{name} = {_value(value)}"


def _value(value: object) -> str:
    """One line, tables and lists within it inline."""
    if isinstance(value, Mapping):
        return "{" + ", ".join(_assignment(key, inner) for key, inner in value.items()) + "}"
    if isinstance(value, (list, tuple)):
        return "[" + ", ".join(_value(inner) for inner in value) + "]"
    return tomli_w.dumps({"v": value}).removeprefix("v = ").removesuffix("\n")
