"""The plan file: TOML to a plan with all errors at once, and back by changing only the lines that changed."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field, replace
from difflib import SequenceMatcher
from pathlib import Path
from typing import Any

from planner import durable, tomltext
from planner.declare import Given
from planner.kinds import MOST_COUNTED, clean
from planner.plan import ROWS, SECTIONS, TABLES, Plan, table_givens, with_rows, with_section
from planner.soundness import problems
from planner.tomltext import Change, InsertRow, RemoveRow
from planner.values import GivenError, Value, nearest, read_value

LARGEST_FILE = 1_000_000  # bytes
MOST_ROWS = 2000
MOST_SENTENCES = 200  # no file has so many errors of its own; beyond, something else was read as a plan
FORMAT = 1
TOO_DEEP = "the file is nested too deeply: a plan has tables and values only"
# Fifty dotted names in a row, which the TOML parser takes minutes for, and more digits than Python reads.
_DEEP_KEY = re.compile(r"""(?<![\w\-"'])(?:(?:[\w-]+|"[^"\n]*"|'[^'\n]*')[ \t]*\.[ \t]*){50}""")
_ENDLESS = re.compile(r"\d[\d_]{4000,}")
# Keys after which a new file leaves a blank line: git can't merge changes on adjacent lines.
GROUP_ENDS = frozenset(
    {
        "format",
        "note",
        "fridge_run",
        "magnet.azimuth",
        "magnet.drift_persistent",
        "magnet.noise_persistent",
        "magnet.since_ramp",
        "clock.aging",
        "source.guard",
        "source.if_half_width",
        "chip.drive_leak",
        "model.nuclei",
        "model.barrier_spinful",
        "workload.refocusing_pulses",
        "workload.accumulation",
        "workload.source_share",
        "workload.allowed_readout_error",
        "calibration.wait",
        "calibration.shot_time",
    }
)


class PlanError(Exception):
    """A file that is no plan; `sentences` name file, line and key, what was read and what would be accepted."""

    def __init__(self, sentences: list[str]) -> None:
        super().__init__("\n".join(sentences))
        self.sentences = sentences


class ChangedOnDisk(Exception):
    """The file's bytes are no longer those that were loaded."""


@dataclass(frozen=True, slots=True)
class Document:
    """A plan with the text it was read from.

    `fingerprint` is the file's at that moment (None: no such file), `ignored` are notes on lines that don't count.
    """

    path: Path | None
    text: str
    plan: Plan
    fingerprint: str | None = None
    ignored: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class _Finding:
    """One misfit in a file: the place in the data, the dotted key, and a sentence."""

    path: tomltext.Path
    key: str
    sentence: str


@dataclass(slots=True)
class _Reader:
    """Collects the values and the misfits of one file."""

    plan: Plan = field(default_factory=Plan)
    wrong: list[_Finding] = field(default_factory=list)
    unknown: list[_Finding] = field(default_factory=list)


def load(path: Path, *, keep_unknown: bool = False) -> Document:
    """Read a plan file. Raises PlanError with all errors of the file.

    Unknown keys are errors, or with `keep_unknown` lines that are kept and noted as not counting.
    """
    try:
        text = durable.read_text(path, LARGEST_FILE)
    except durable.ReadError as error:
        raise PlanError([str(error)]) from None
    document = read(text, clean(str(path)), keep_unknown=keep_unknown)
    return replace(document, path=path, fingerprint=durable.fingerprint_of(text))


def read(text: str, name: str, *, keep_unknown: bool = False) -> Document:
    """Read the text of a plan file called `name` in messages. Raises PlanError with all its errors."""
    data = _parsed(text, name)
    _refuse_many_rows(data, name)
    reader = _Reader()
    _read_tables(reader, data)
    wrong = reader.wrong + ([] if keep_unknown else reader.unknown) + _misfits(reader)
    lines = tomltext.locate(text) if wrong or reader.unknown else {}
    if wrong:
        raise PlanError(_sentences(wrong, lines, name))
    unknown = _sentences(reader.unknown, lines, name)
    ignored = tuple(f"{sentence}; the line is kept and does not count" for sentence in unknown)
    return Document(None, text, reader.plan, ignored=ignored)


def text_of(document: Document, plan: Plan) -> tuple[str, bool]:
    """The document's text with what changed in the plan, and whether it could not be changed by lines.

    Then, and for a new document, it is in house form: comments of the old text are lost.
    """
    if not document.text:
        return house_form(plan), False
    if plan == document.plan:
        return document.text, False
    try:
        patched = tomltext.patch(document.text, list(_edits(document, plan)), _order())
        if read(patched, "", keep_unknown=True).plan == plan:
            return patched, False
    except (tomltext.CannotPatch, PlanError):
        pass
    return house_form(plan, tomllib.loads(document.text)), True


def house_form(plan: Plan, beside: Mapping[str, Any] | None = None) -> str:
    """The plan as a new file, one value a line; with the entries of `beside` that are no givens."""
    return tomltext.write(_data(plan, beside or {}), _order())


def save(document: Document, plan: Plan, path: Path, *, overwrite: bool = False) -> Document:
    """Write the plan to `path` and return the document as it then is on disk.

    Raises ChangedOnDisk where the file is not the one that was loaded (or, for another path, exists already) unless
    `overwrite`; `durable.SaveError` where it can't be written.
    """
    on_disk = durable.fingerprint(path)
    expected = document.fingerprint if path == document.path else None
    if on_disk != expected and not overwrite:
        loaded = path == document.path
        what = "is not the file that was loaded: someone else may have written it" if loaded else "exists already"
        raise ChangedOnDisk(f"{path} {what}")
    text, _ = text_of(document, plan)
    durable.write_atomically(path, text)
    return Document(path, text, plan, durable.fingerprint_of(text), document.ignored)


def _parsed(text: str, name: str) -> dict[str, Any]:
    if not text.strip():
        raise PlanError([f"{name}: the file is empty: a plan begins with 'format = 1'"])
    too_deep = _DEEP_KEY.search(text)
    if too_deep:
        raise PlanError([f"{name}:{_line_at(text, too_deep.start())}: {TOO_DEEP}"])
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise PlanError([_no_toml(text, name, str(error))]) from None
    except ValueError:  # Python reads no whole number of so many digits
        found = _ENDLESS.search(text)
        line = f":{_line_at(text, found.start())}" if found else ""
        raise PlanError([f"{name}{line}: a whole number beyond 1e18 is too large: write a smaller one"]) from None
    except RecursionError:
        raise PlanError([f"{name}: {TOO_DEEP}"]) from None


def _no_toml(text: str, name: str, error: str) -> str:
    """The sentence for a text that the TOML parser refuses, from its message."""
    found = re.search(r"line (\d+)", error)
    line = int(found.group(1)) if found else _line_at(text, len(text.rstrip()))
    shown = clean(text.split("\n")[line - 1].strip())[:60]
    if "Cannot overwrite" in error or "Cannot declare" in error:
        return f"{name}:{line}: '{shown}' stands twice: keep one, with all that belongs to it"
    what = clean(re.sub(r" \(at .*\)$", "", error))
    return f"{name}:{line}: this is not TOML ({what}): read '{shown}', expected 'key = \"value\"'"


def _line_at(text: str, place: int) -> int:
    return text.count("\n", 0, place) + 1


def _refuse_many_rows(data: Mapping[str, Any], name: str) -> None:
    rows = sum(len(rows) for rows in data.values() if isinstance(rows, list))
    if rows > MOST_ROWS:
        raise PlanError([f"{name}: the plan has {rows} rows: use at most {MOST_ROWS}"])


def _read_tables(reader: _Reader, data: Mapping[str, Any]) -> None:
    _read_section(reader, "", {key: value for key, value in data.items() if key not in SECTIONS and key not in ROWS})
    for table in TABLES:
        if table and table in data:
            if table in ROWS:
                _read_rows(reader, table, data[table])
            elif isinstance(data[table], dict):
                _read_section(reader, table, data[table])
            else:
                reader.wrong.append(_Finding((table,), table, f"is a table: write it as [{table}]"))


def _read_section(reader: _Reader, table: str, entries: Mapping[str, Any]) -> None:
    values = _read_entries(reader, table, entries, ((table,) if table else ()), f"{table}." if table else "")
    reader.plan = with_section(reader.plan, table, SECTIONS[table](**values))


def _read_rows(reader: _Reader, table: str, entries: object) -> None:
    if not isinstance(entries, list) or not all(isinstance(entry, dict) for entry in entries):
        reader.wrong.append(_Finding((table,), table, f"is a list of tables: write each as [[{table}]]"))
        return
    rows = []
    for index, entry in enumerate(entries):
        name = entry.get("name")
        label = clean(name)[:40] if isinstance(name, str) and name else str(index + 1)
        rows.append(ROWS[table](**_read_entries(reader, table, entry, (table, index), f"{table}.{label}.")))
    reader.plan = with_rows(reader.plan, table, tuple(rows))


def _read_entries(
    reader: _Reader, table: str, entries: Mapping[str, Any], path: tomltext.Path, prefix: str
) -> dict[str, Value]:
    givens = table_givens(table)
    values: dict[str, Value] = {}
    for key, raw in entries.items():
        if key not in givens:
            hint = _unknown_hint(table, key) if len(reader.unknown) < MOST_SENTENCES else ""
            reader.unknown.append(_Finding((*path, key), prefix + clean(key)[:40], f"is not a given{hint}"))
            continue
        try:
            values[key] = read_value(givens[key], raw)
        except GivenError as error:
            reader.wrong.append(_Finding((*path, key), prefix + key, _newer_format(prefix + key, raw) or str(error)))
    return values


def _unknown_hint(table: str, key: str) -> str:
    """What to write instead of a key that is no given."""
    if (table, key) == ("all_qubits", "name"):
        return " of the qubits together: name each [[qubit]]"
    known = [*table_givens(table), *(() if table else (*SECTIONS, *ROWS))]
    return nearest(key, [each for each in known if each]) or f": see 'planner words{f' {table}' if table else ''}'"


def _newer_format(key: str, raw: object) -> str:
    if key == "format" and isinstance(raw, int) and FORMAT < raw <= MOST_COUNTED:
        return f"'{raw}' is newer than this program, which reads format {FORMAT}: update it"
    return ""


def _misfits(reader: _Reader) -> list[_Finding]:
    """The problems of the plan as a whole, but those that follow from a value or table that could not be read."""
    refused = {finding.path for finding in reader.wrong}
    found = (_Finding(_place(reader.plan, key), key, sentence) for key, sentence in problems(reader.plan))
    return [each for each in found if not any(each.path[:depth] in refused for depth in range(1, len(each.path) + 1))]


def _place(plan: Plan, key: str) -> tomltext.Path:
    """Where a key of a problem stands in the file's data, as near as it can be named."""
    table, _, rest = key.partition(".")
    name, _, given = rest.rpartition(".")
    if table in ROWS and name:
        rows = plan.rows(table)
        index = max((i for i, row in enumerate(rows) if name in (getattr(row, "name", None), str(i + 1))), default=None)
        return (table,) if index is None else (table, index, given)
    return tuple(key.split("."))


def _sentences(findings: list[_Finding], lines: Mapping[tomltext.Path, int], name: str) -> list[str]:
    """A sentence for each finding in the order of the file; of very many, the first and how many more."""
    ordered = sorted(findings, key=lambda finding: _line(finding, lines))
    more = [f"{name}: and {len(ordered) - MOST_SENTENCES} more like these"] if len(ordered) > MOST_SENTENCES else []
    return [_sentence(finding, lines, name) for finding in ordered[:MOST_SENTENCES]] + more


def _line(finding: _Finding, lines: Mapping[tomltext.Path, int]) -> int:
    """The line of the finding, or of the nearest table around it; 0 where it has none."""
    path = finding.path
    while path:
        if path in lines:
            return lines[path]
        path = path[:-1]
    return 0


def _sentence(finding: _Finding, lines: Mapping[tomltext.Path, int], name: str) -> str:
    line = _line(finding, lines)
    where = f"{name}:{line}" if line else name
    return f"{where}: {finding.key}: {finding.sentence}" if finding.key else f"{where}: {finding.sentence}"


def _edits(document: Document, plan: Plan) -> Iterator[tomltext.Edit]:
    """What to change in the text to turn the document's plan into this one."""
    data = tomllib.loads(document.text)
    for table in SECTIONS:
        old, new = document.plan.chapter(table), plan.chapter(table)
        found = data.get(table, {}) if table else data
        if old is not new:
            yield from _changes(table, (table,) if table else (), old, new, found)
    for table in ROWS:
        if document.plan.rows(table) is not plan.rows(table):
            yield from _row_edits(table, document.plan.rows(table), plan.rows(table), data.get(table, []))


def _changes(table: str, path: tomltext.Path, old: Any, new: Any, found: Mapping[str, Any]) -> Iterator[Change]:
    for name, given in table_givens(table).items():
        before, after = getattr(old, name), getattr(new, name)
        if before != after:
            yield Change((*path, name), None if after is None else _toml(given, after, found.get(name)))


def _row_edits(table: str, old: tuple[Any, ...], new: tuple[Any, ...], found: list[Any]) -> Iterator[tomltext.Edit]:
    """Rows are matched by name; a stretch of as many rows in the same place is a change of these rows."""
    before, after = ([str(getattr(row, "name", None)) for row in rows] for rows in (old, new))
    for tag, first, last, start, end in SequenceMatcher(None, before, after, autojunk=False).get_opcodes():
        if tag == "equal" or (tag == "replace" and last - first == end - start):
            for index, row in zip(range(first, last), new[start:end], strict=True):
                yield from _changes(table, (table, index), old[index], row, found[index])
        else:
            yield from (RemoveRow(table, index) for index in range(first, last))
            yield from (InsertRow(table, first, _row_data(table, row, {})) for row in new[start:end])


def _toml(given: Given, value: Value, found: object = None) -> str | int | float:
    """A value as the file holds it: quantities as strings, counts as integers, a bare number where one was found."""
    if isinstance(value, str):
        return value
    text = value.text
    if given.kind is not None and given.kind.whole and text.isdigit():
        return int(text)
    if isinstance(found, int | float) and not isinstance(found, bool):
        for bare in (int, float):
            try:
                if repr(bare(text)) == text:
                    return bare(text)
            except ValueError:
                continue
    return text


def _data(plan: Plan, beside: Mapping[str, Any]) -> dict[str, Any]:
    data: dict[str, Any] = {}
    for table in TABLES:
        if table in SECTIONS:
            found = beside.get(table, {}) if table else beside
            values = _row_data(table, plan.chapter(table), found)
            data.update(values if not table else {table: values} if values else {})
        elif plan.rows(table):
            found_rows = {row["name"]: row for row in beside.get(table, []) if "name" in row}
            data[table] = [
                _row_data(table, row, found_rows.get(getattr(row, "name", None), {})) for row in plan.rows(table)
            ]
    return data


def _row_data(table: str, chapter: Any, found: Mapping[str, Any]) -> dict[str, Any]:
    """The typed values of a chapter in the order of the file, and what else was found there."""
    givens = table_givens(table)
    typed = {
        name: _toml(given, value, found.get(name))
        for name, given in givens.items()
        if (value := getattr(chapter, name)) is not None
    }
    others = {key: value for key, value in found.items() if key not in givens}
    return typed | {key: value for key, value in others.items() if table or (key not in SECTIONS and key not in ROWS)}


def _order() -> dict[str, list[str]]:
    """House order of tables and of the keys of each, '' where a new file leaves a blank line."""
    order: dict[str, list[str]] = {"<tables>": [table for table in TABLES if table]}
    for table in TABLES:
        keys: list[str] = []
        for name in table_givens(table):
            keys.append(name)
            if (f"{table}.{name}" if table else name) in GROUP_ENDS:
                keys.append("")
        order[table] = keys
    return order
