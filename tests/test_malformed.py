"""Bad input: whatever is wrong with a plan file, a --with or a cell ends in one sentence to act on and changes nothing.

A sentence names what was read and what would be accepted; in a file, its line and dotted key stand before it. Of a cell
it is the same sentence in the file, behind --with and below the cell in the editor.
"""

from __future__ import annotations

import asyncio
import io
import os
from collections.abc import Callable
from pathlib import Path
from typing import Any, NamedTuple

import pytest

from planner import cli
from planner.planfile import MOST_ROWS, MOST_SENTENCES, load
from planner.tui import app as editor
from planner.tui.app import Planner
from tests.planmaking import BENCH, Entry, second, text_of
from tests.tui.harness import keys, painted, paste, settle

GOOD = """format = 1

[magnet]
field = "500 mT"

[chip]
material = "si-sige-natural"

[workload]
gates = 100

[[qubit]]
name = "Q1"
g = 2.0
"""
FIELD, CHIP, GATES, FORMAT = 'field = "500 mT"', 'material = "si-sige-natural"', "gates = 100", "format = 1"
NAME, G = 'name = "Q1"', "g = 2.0"


class Refused(NamedTuple):
    """What `check` says of a file: where (line and key), what was read, what is accepted; one sentence a file."""

    text: str
    where: str
    read: str
    accepted: str


def bad(old: str, new: str, where: str, read: str, accepted: str) -> Refused:
    """The good plan with a piece replaced."""
    assert old in GOOD
    return Refused(GOOD.replace(old, new, 1), where, read, accepted)


def more(text: str, where: str, read: str, accepted: str) -> Refused:
    """The good plan with more behind it; its own lines are 14."""
    return Refused(GOOD + text, where, read, accepted)


# What a cell can't hold: forms of TOML, keys, tables, names.
FILES: dict[str, Refused] = {
    "no unit": bad(FIELD, 'field = "500"', "4: magnet.field", "'500' has no unit", "mT, T, uT, nT"),
    "bare number": bad(FIELD, "field = 500", "4: magnet.field", "500 has no unit", 'in quotes, such as "0.5 mT"'),
    "true": bad(FIELD, "field = true", "4: magnet.field", "true or false", 'in quotes, such as "0.5 mT"'),
    "list": bad(FIELD, "field = [1, 2, 3]", "4: magnet.field", "a list", 'in quotes, such as "0.5 mT"'),
    "inline table": bad(FIELD, "field = {size = 1}", "4: magnet.field", "a table", 'in quotes, such as "0.5 mT"'),
    "date for a field": bad(FIELD, "field = 2027-02-01", "4: magnet.field", "a date or time", 'such as "0.5 mT"'),
    "empty text": bad(FIELD, 'field = ""', "4: magnet.field", "no number is given", "write one, then its unit"),
    "character that is not shown": bad(FIELD, 'field = "5\u200b00 mT"', "4: magnet.field",
        "'5\ufffd00 mT' has a character that is not shown (U+200B)", "retype it"),
    "not a number": bad(G, "g = nan", "14: qubit.Q1.g", "'nan' is not a number", "write a finite number"),
    "infinite": bad(G, "g = -inf", "14: qubit.Q1.g", "'-inf' is not a number", "write a finite number"),
    "endless number": bad(GATES, f"gates = {'1' * 5000}", "10", "a whole number beyond 1e18", "write a smaller one"),
    "endless hexadecimal": bad(GATES, f"gates = 0x{'f' * 5000}", "10: workload.gates", "beyond 1e18", "a smaller one"),
    "endless title": bad(FORMAT, f"format = 1\ntitle = 0x{'f' * 5000}", "2: title", "beyond 1e18",
        "write it in quotes"),
    "endless word": bad(CHIP, f"material = 0x{'f' * 5000}", "7: chip.material", "beyond 1e18",
        "use one of si-sige-natural"),
    "endless date": bad(FORMAT, f"format = 1\nclosing_date = 0x{'f' * 5000}", "2: closing_date", "beyond 1e18",
        "as 2027-02-01"),
    "endless format": bad(FORMAT, f"format = 0x{'f' * 5000}", "1: format", "beyond 1e18", "write a smaller one"),
    "number for a title": bad(FORMAT, "format = 1\ntitle = 5", "2: title", "'5' is not a text", "write it in quotes"),
    "number for a word": bad(CHIP, "material = 3", "7: chip.material", "'3' is not one of",
        "use one of si-sige-natural"),
    "newer format": bad(FORMAT, "format = 2", "1: format", "'2' is newer than this program",
        "reads format 1: update it"),
    "no format": bad(FORMAT, "", "", "format: is required", "as '1'"),
    "true for a format": bad(FORMAT, "format = true", "1: format", "true or false", 'such as "5"'),
    "no field": bad(FIELD, "", "3: magnet.field", "is required: size set at the supply", "as '650 mT'"),
    "no material": bad(CHIP, "", "6: chip.material", "is required", "as 'si-sige-800ppm'"),
    "no gate count": bad(GATES, "", "9: workload.gates", "is required: target gate count", "as '500'"),
    "no name": bad(NAME, "", "12: qubit.1.name", "is required: name of the qubit", "as 'Q1'"),
    "no g": bad(G, "", "12: qubit.Q1.g", "is required: g-factor", "as '2.00'"),
    "no qubit": Refused(GOOD[: GOOD.index("[[qubit")], "", "qubit: is required",
        "at least one [[qubit]] with name and g"),
    "no row": Refused("qubit = []\n" + GOOD[: GOOD.index("[[qubit")], "1: qubit", "is required",
        "at least one [[qubit]]"),
    "unknown key": bad(FIELD, f"{FIELD}\ncolour = 1", "5: magnet.colour", "is not a given",
        "see 'planner words magnet'"),
    "unknown key on top": bad(FORMAT, "format = 1\nx = 1", "2: x", "is not a given", "see 'planner words'"),
    "misspelt key": bad(G, f'{G}\nfreqency_noise = "4 kHz/rtHz"', "15: qubit.Q1.freqency_noise", "is not a given",
        "did you mean frequency_noise?"),
    "misspelt table": more("[calibartion]\nshots = 5\n", "15: calibartion", "is not a given",
        "did you mean calibration?"),
    "table in a table": more("[magnet.z]\nrating = 1\n", "15: magnet.z", "is not a given",
        "see 'planner words magnet'"),
    "key with control characters": bad(FIELD, f'{FIELD}\n"a\\u001b[31m" = 1', "5: magnet.a\ufffd[31m", "is not a given",
        "see 'planner words"),
    "name for all qubits": more('[all_qubits]\nname = "x"\n', "16: all_qubits.name",
        "is not a given of the qubits together",
        "name each [[qubit]]"),
    "value for a table": Refused("clock = 5\n" + GOOD, "1: clock", "is a table", "write it as [clock]"),
    "value for a needed table": Refused(f"magnet = 5\n{GOOD.replace('[magnet]', '').replace(FIELD, '')}", "1: magnet",
        "is a table", "write it as [magnet]"),
    "list for a table": bad("[magnet]", "[[magnet]]", "3: magnet", "is a table", "write it as [magnet]"),
    "table for a list": bad("[[qubit]]", "[qubit]", "12: qubit", "is a list of tables", "write each as [[qubit]]"),
    "numbers for rows": Refused("stage = [1, 2]\n" + GOOD, "1: stage", "is a list of tables",
        "write each as [[stage]]"),
    "no TOML": bad(FIELD, "field = 500 mT", "4", "not TOML", "read 'field = 500 mT', expected 'key = \"value\"'"),
    "no equals sign": bad(FIELD, "field 500", "4", "not TOML", "read 'field 500', expected 'key = \"value\"'"),
    "open quote": bad(FIELD, 'field = "500 mT', "4", "not TOML", "read 'field = \"500 mT', expected"),
    "open quote at the end": Refused(f'{GOOD}note = "no end\n\n', "15", "not TOML", "read 'note = \"no end', expected"),
    "open text of several lines": Refused(f'{GOOD}note = """no\nend\n\n', "16", "not TOML", "read 'end', expected"),
    "open bracket": bad("[magnet]", "[magnet", "3", "not TOML", "read '[magnet', expected"),
    "impossible date": bad(FORMAT, "format = 1\nclosing_date = 2027-13-01", "2", "not TOML",
        "read 'closing_date = 2027-13"),
    "control character": bad(FIELD, 'field = "5\x0000 mT"', "4", "not TOML",
        "read 'field = \"5\ufffd00 mT\"', expected"),
    "key twice": bad(FIELD, f"{FIELD}\n{FIELD}", "5", "'field = \"500 mT\"' stands twice", "keep one"),
    "table twice": more('[magnet]\nazimuth = "0 deg"\n', "15", "'[magnet]' stands twice",
        "keep one, with all that belongs"),
    "name twice": more('[[qubit]]\ng = 2\nname = "Q1"\n', "17: qubit.Q1.name", "the name 'Q1' is used twice",
        "give every qubit its own"),
    "number for a name": bad(NAME, "name = 1", "13: qubit.1.name", "'1' is not a text", "write it in quotes"),
    "endless name": bad(NAME, f'name = "{"Q" * 600}"', f"13: qubit.{'Q' * 40}.name", "600 characters",
        "use at most 500"),
    "name with a dot, and no g": Refused(GOOD.replace(NAME, 'name = "Q.1"'), "13: qubit.1.name",
        "'Q.1' can't be a name",
        "use letters and digits"),
    "name not shown": bad(NAME, 'name = "Q\\u200b1"', "13: qubit.1.name", "'Q\ufffd1' can't be a name", "use letters"),
    "pair without a qubit": more('[[pair]]\nname = "P"\nfirst = "Q1"\nsecond = "Q11"\n', "18: pair.P.second",
        "there is no qubit 'Q11'", "did you mean Q1?"),
    "attenuators": more('[[stage]]\nname = "still"\n[[line]]\nname = "drive"\nattenuation = "3, 20 dB"\n',
        "19: line.drive.attenuation", "'3, 20 dB' has 2 values for 1 stages", "one dB value per stage"),
    "negative offset": more('[[phase_noise]]\noffset = "-1 kHz"\nlevel = "-90 dBc/Hz"\ncarrier = "1 GHz"\n',
        "16: phase_noise.1.offset", "'-1 kHz' is out of range", "more than 0 kHz"),
    "deep lists": bad(FIELD, f"field = {'[' * 3000}", "", "nested too deeply", "tables and values only"),
    "deep key": bad(FIELD, f"{FIELD}\n{'a.' * 30000}a = 1", "5", "nested too deeply", "tables and values only"),
    "deep table": more(f"[{'a.' * 30000}a]\n", "15", "nested too deeply", "tables and values only"),
    "too many rows": more("[[qubit]]\n" * MOST_ROWS, "", f"has {MOST_ROWS + 1} rows", f"use at most {MOST_ROWS}"),
    "byte order mark": Refused(f"\ufeff{GOOD}", "", "starts with a byte order mark", "save it as UTF-8 without one"),
    "empty": Refused("", "", "the file is empty", "a plan begins with 'format = 1'"),
    "blank": Refused(" \n\n", "", "the file is empty", "a plan begins with 'format = 1'"),
}  # fmt: skip


class Cell(NamedTuple):
    """A text that a given refuses: its key, the text, and the sentence, in which {key} stands for the key."""

    key: str
    text: str
    sentence: str


ERROR_RANGE = "must be more than 0 and less than 0.3333"
CELLS: dict[str, Cell] = {
    "wrong unit": Cell("magnet.field", "500 MHz", "'MHz' is not a unit of field: use mT, T, uT, nT"),
    "other case": Cell("magnet.field", "500 MT", "'MT' is not a unit of field: did you mean mT?"),
    "angular": Cell("qubit.Q1.rabi_frequency", "2 rad/s", "'rad/s' is not a unit of frequency: use Hz, kHz, MHz, GHz"),
    "degrees": Cell("chip.electron_temperature", "20 degC", "'degC' is not a unit of temperature: use mK, K, uK"),
    "unit of a fraction": Cell("clock.deviation_1s", "2e-12 s",
        "'s' is not a unit of fraction: use %, ppm, ppb or no unit"),
    "unit of a number": Cell("qubit.Q1.g", "2.0 T", "'T' stands behind a number: write the number without a unit"),
    "decimal comma": Cell("magnet.field", "0,5 T", "'0,5 T': a comma is not a decimal point, write '0.5 T'"),
    "thousands": Cell("magnet.field", "1,000 mT", "'1,000 mT' could have thousands marks: write none"),
    "expression": Cell("magnet.field", "9**9**9 mT", "'**9**9 mT' is not a unit of field: use mT, T, uT, nT"),
    "no number": Cell("magnet.field", "strong", "'strong' does not read as a number, then its unit, such as 0.5 mT"),
    "nan": Cell("magnet.field", "nan mT", "'nan mT' is not a number to plan with: write a finite number"),
    "negative tolerance": Cell("magnet.field", "500 ± -2 mT",
        "'500 ± -2 mT' has a negative tolerance: write 0 or more"),
    "two tolerances": Cell("magnet.field", "500 ± 2 mT ± 1 %", "'500 ± 2 mT ± 1 %' has two tolerances: write one"),
    "long": Cell("magnet.field", "1" * 90 + " mT", "is 93 characters long: at most 80 are read before a ';'"),
    "huge": Cell("magnet.noise_driven", "1e300 mT", "'1e300 mT' is out of range: write at most 1e30 mT"),
    "tiny": Cell("qubit.Q1.rabi_frequency", "1e-300 Hz", "'1e-300 Hz' is out of range"),
    "huge tolerance": Cell("magnet.azimuth", "0 ± 1e200 deg",
        "'0 ± 1e200 deg' is out of range: write at most 1e30 deg"),
    "no field": Cell("magnet.field", "0 mT", "size set at the supply, local fields excluded must be more than 0 mT"),
    "strong field": Cell("magnet.field", "51 T", "must be more than 0 T and at most 50 T"),
    "required": Cell("magnet.field", " ", "is required: size set at the supply, local fields excluded, as '650 mT'"),
    "negative temperature": Cell("chip.electron_temperature", "-95 mK", "'-95 mK' is out of range"),
    "zero gates": Cell("workload.gates", "0", "'0' is out of range: target gate count per qubit must be at least 1"),
    "negative gates": Cell("workload.gates", "-5", "'-5' is not a count: write a whole number from 0 to 1e18"),
    "half a gate": Cell("workload.gates", "1.5", "'1.5' is not a count: write a whole number from 0 to 1e18"),
    "g of zero": Cell("qubit.Q1.g", "0", "'0' is out of range: it must not be 0"),
    "tensor of zero": Cell("qubit.Q1.g", "0, 0, 0", "'0, 0, 0' is out of range: it must not be 0"),
    "half a tensor": Cell("qubit.Q1.g", "0.28, 0.44",
        "'0.28, 0.44' holds 2 numbers: write 1 or 3 numbers, with a comma"),
    "huge g": Cell("qubit.Q1.g", "200", "'200' is out of range"),
    "no vector": Cell("qubit.Q1.local_field", "146 mT",
        "'146 mT' holds 1 number: write 3 numbers, with a comma between"),
    "comma too many": Cell("qubit.Q1.local_field", "146, , 8 mT", "'146, , 8 mT' lacks a number beside a comma"),
    "circuit error 0.4": Cell("workload.allowed_sequence_error", "0.4",
        f"allowed error of the whole circuit {ERROR_RANGE}"),
    "gate error 0.5": Cell("workload.allowed_gate_error", "0.5", "must be more than 0 and less than 0.5"),
    "no gate error": Cell("workload.allowed_gate_error", "0", "must be more than 0 and less than 0.5"),
    "share above 1": Cell("workload.source_share", "1.2", "must be more than 0 and at most 1"),
    "negative wait": Cell("workload.idle_per_gate", "-1 ns",
        "'-1 ns' is out of range: idle time that follows each gate"),
    "contrast in percent": Cell("calibration.contrast", "60", "'60' is out of range: contrast of the Ramsey fringe"),
    "no shots": Cell("calibration.shots", "0", "'0' is out of range: shots of one calibration must be at least 1"),
    "steep": Cell("magnet.elevation", "91 deg", "must be at least -90 deg and at most 90 deg"),
    "misspelt word": Cell("magnet.mode", "persistant", "'persistant' is not one of the choices: use one of driven, "
        "persistent; did you mean persistent?"),
    "unknown material": Cell("chip.material", "unobtainium",
        "'unobtainium' is not one of the choices: use one of si-sige"),
    "passed": Cell("passed", "lunch", "'lunch' is not one of the choices: use one of none, wafer, bonding, closing"),
    "date": Cell("closing_date", "1 February", "'1 February' is not a date: write year-month-day, as 2027-02-01"),
    "wanted margin": Cell("wanted_margin", "0.9", "'0.9' is out of range"),
    "format": Cell("format", "0", "'0' is out of range: version of the file format"),
    "band upside down": Cell("source.low", "19 GHz",
        "'18 GHz' is not above source.low '19 GHz': the band runs from low"),
    "short gate": Cell("workload.gate_time", "10 ns",
        "'10 ns' is shorter than half a Rabi period of Q1, 250 ns: use at least"),
    "slow Rabi": Cell("qubit.Q2.rabi_frequency", "1 kHz",
        "workload.gate_time: '300 ns' is shorter than half a Rabi period of "
        "Q2, 5e+05 ns"),
    "name twice": Cell("qubit.Q2.name", "Q1", "the name 'Q1' is used twice: give every qubit its own"),
    "name with a dot": Cell("qubit.Q2.name", "Q.2",
        "'Q.2' can't be a name: use letters and digits, no dot, = or quote"),
    "name with an equals sign": Cell("qubit.Q2.name", "a=b", "'a=b' can't be a name: use letters and digits"),
    "no name": Cell("qubit.Q2.name", " ", "is required: name of the qubit: its identity in the plan, as 'Q1'"),
    "no g": Cell("qubit.Q1.g", " ", "qubit.Q1.g: is required: g-factor, or three principal values"),
}  # fmt: skip
PLAN: dict[str, Entry] = {**BENCH, "workload.gate_time": "300 ns", **second()}


@pytest.fixture
def plan(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A path for a plan, named as short as people name it."""
    monkeypatch.chdir(tmp_path)
    return Path("plan.toml")


@pytest.fixture
def said(capsys: pytest.CaptureFixture[str]) -> Callable[..., list[str]]:
    """Runs a command that must refuse its input; the lines it says on standard error."""

    def run(*arguments: str) -> list[str]:
        assert cli.main(arguments) == 2
        output = capsys.readouterr()
        assert output.out == ""
        assert "Traceback" not in output.err
        return output.err.splitlines()

    return run


def found(sentence: str, wanted: str) -> bool:
    """Whether a sentence is there, however the screen breaks it into lines."""
    return " ".join(wanted.split()) in " ".join(sentence.split())


def test_the_plans_that_are_spoilt_here_are_good(plan: Path) -> None:
    for text in (GOOD, text_of(PLAN)):
        plan.write_text(text, encoding="utf-8")
        assert load(plan).ignored == ()


@pytest.mark.parametrize("case", FILES)
def test_a_malformed_file_is_refused_in_one_sentence(case: str, plan: Path, said: Callable[..., list[str]]) -> None:
    text, where, read, accepted = FILES[case]
    plan.write_bytes(text.encode())
    (sentence,) = said("check", str(plan))
    assert sentence.startswith(f"plan.toml:{where}: " if where else "plan.toml")
    assert read in sentence
    assert accepted in sentence
    assert sentence.isprintable()
    assert plan.read_bytes() == text.encode()


@pytest.mark.parametrize("case", CELLS)
def test_a_malformed_value_is_refused_in_a_file_and_behind_with(
    case: str, plan: Path, said: Callable[..., list[str]]
) -> None:
    key, text, sentence = CELLS[case]
    changes = {**PLAN, key: text if text.strip() else None}
    if not key.endswith(".name"):  # the rows of `text_of` are named by their keys
        spoilt = text_of(changes)
        plan.write_text(spoilt, encoding="utf-8")
        (of_file,) = said("check", str(plan))
        assert of_file.startswith("plan.toml:")
        assert found(of_file, sentence)
        line = int(of_file.split(":")[1])
        named = of_file.split(": ")[1]
        assert named.rpartition(".")[2] in spoilt.splitlines()[line - 1] or " is required" in of_file
    plan.write_text(text_of(PLAN), encoding="utf-8")
    (of_with,) = said("check", str(plan), "--with", f"{key}={text}")
    assert found(of_with, sentence)
    assert key in of_with
    assert plan.read_text(encoding="utf-8") == text_of(PLAN)


def test_a_malformed_cell_is_refused_below_it_and_keeps_its_text(plan: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """All in one editor: the sentence while typing and after Enter; text kept, plan, past and file as they were."""
    monkeypatch.setattr(editor.terminal, "install_signal_handlers", lambda *_: None)  # signals are the tests' own
    plan.write_text(text_of(PLAN), encoding="utf-8")
    app = Planner(load(plan))
    before = app.session
    wrong: list[str] = []

    async def session() -> None:
        async with app.run_test(size=(80, 24)):
            await painted(app)
            for case, cell in CELLS.items():
                wrong.extend(f"{case}: {what}" for what in await misfits(app, cell))
                if app.session is not before:
                    wrong.append(f"{case}: the session has changed")

    asyncio.run(session())
    assert wrong == []
    assert app.session is before
    assert (app.session.past, app.session.future, app.session.saved) == ((), (), True)
    assert plan.read_text(encoding="utf-8") == text_of(PLAN)
    assert list(Path().iterdir()) == [plan]


async def misfits(app: Planner, cell: Cell) -> list[str]:
    """What is not as it must be when this text is typed into this cell."""
    table = cell.key.rpartition(".")[0]
    in_rows = table.startswith("qubit.")
    app.visit("qubit" if in_rows else table)
    await settle(app)
    grid = app.desk.qubits if in_rows else app.desk.pane
    if not grid.move_to(cell.key):
        return ["there is no such cell"]
    await paste(app, cell.text)
    missing = [] if found(str(app.foot.content), cell.sentence) else [f"while typing the foot shows {app.foot.content}"]
    await keys(app, "enter")
    if not found(str(app.foot.content), cell.sentence):
        missing.append(f"after Enter the foot shows {app.foot.content}")
    if not grid.typing or (cell.text.strip() and cell.text[:30].strip() not in painted_text(grid)):
        missing.append("the text is gone")
    await keys(app, "escape")
    if grid.typing:
        missing.append("Escape does not give the text up")
    return missing


def painted_text(grid: Any) -> str:
    """The lines of a grid as they are painted."""
    return "\n".join(grid.render_line(y).text for y in range(grid.size.height))


def test_all_errors_of_a_file_are_said_at_once_in_their_order(plan: Path, said: Callable[..., list[str]]) -> None:
    plan.write_text(
        'format = 1\ntitel = "x"\n[magnet]\nfield = "5 T T"\nmode = "idle"\n[chip]\n[workload]\ngates = 0\n'
        "[[qubit]]\nname = 'Q1'\ng = 2\n[[qubit]]\nname = 'Q1'\ng = 0\n",
        encoding="utf-8",
    )
    sentences = said("check", str(plan))
    assert [sentence.split(": ")[:2] for sentence in sentences] == [
        ["plan.toml:2", "titel"],
        ["plan.toml:4", "magnet.field"],
        ["plan.toml:5", "magnet.mode"],
        ["plan.toml:6", "chip.material"],
        ["plan.toml:8", "workload.gates"],
        ["plan.toml:13", "qubit.Q1.name"],
        ["plan.toml:14", "qubit.Q1.g"],
    ]


def test_errors_of_several_files_are_said_together(plan: Path, capsys: pytest.CaptureFixture[str]) -> None:
    plan.write_text(GOOD, encoding="utf-8")
    Path("other.toml").write_text("x = 1", encoding="utf-8")
    assert cli.main(["check", "other.toml", "plan.toml", "third.toml"]) == 2
    output = capsys.readouterr()
    assert output.out.startswith("plan.toml: unknown\n")
    assert "other.toml:1: x: is not a given" in output.err
    assert output.err.splitlines()[-1] == "There is no file third.toml; check the name and the folder."


def test_of_very_many_errors_the_first_are_said(plan: Path, said: Callable[..., list[str]]) -> None:
    plan.write_text(GOOD + "".join(f"x{number} = 1\n" for number in range(1000)), encoding="utf-8")
    sentences = said("check", str(plan))
    assert len(sentences) == MOST_SENTENCES + 1
    assert sentences[0].startswith("plan.toml:15: qubit.Q1.x0: is not a given")
    assert sentences[-1] == f"plan.toml: and {1000 - MOST_SENTENCES} more like these"


# -- files that can't be read as text; `planner PLAN` and `report` say the same


COMMANDS = (["check"], ["report"], ["report", "--format", "json"], ["edit"], [])


def said_of(path: str, said: Callable[..., list[str]]) -> str:
    """The one sentence that every command says of this file."""
    sentences = {tuple(said(*command, path)) for command in COMMANDS}
    ((sentence,),) = sentences
    return sentence


def test_not_utf_8(plan: Path, said: Callable[..., list[str]]) -> None:
    plan.write_bytes(b'format = 1\ntitle = "G\xf6ttingen"\n')
    sentence = "plan.toml: byte 0xf6 at offset 21 (line 2) is not UTF-8 text; save the file as UTF-8."
    assert said_of("plan.toml", said) == sentence


def test_a_folder(plan: Path, said: Callable[..., list[str]]) -> None:
    plan.mkdir()
    assert said_of("plan.toml", said) == "plan.toml is a folder; name a file in it."


def test_no_such_file(plan: Path, said: Callable[..., list[str]]) -> None:
    assert said_of("plan.toml", said) == "There is no file plan.toml; check the name and the folder."
    assert said_of("no/plan.toml", said) == "There is no file no/plan.toml; check the name and the folder."
    assert said_of("a\x1b[31m.toml", said) == "There is no file a\\x1b[31m.toml; check the name and the folder."
    assert said_of("a\0b", said) == "No file can be named a\\x00b; check the name."


def test_ten_megabytes(plan: Path, said: Callable[..., list[str]]) -> None:
    plan.write_bytes(GOOD.encode() + b"#" * (10_000_000 - len(GOOD)))
    assert said_of("plan.toml", said) == "plan.toml has 10,000,000 bytes; at most 1,000,000 are read."


def test_a_device(said: Callable[..., list[str]]) -> None:
    assert said_of(os.devnull, said) == "/dev/null is a device or a pipe; name a regular file."


def test_no_permission(plan: Path, said: Callable[..., list[str]], monkeypatch: pytest.MonkeyPatch) -> None:
    """The system's answer is made up: the superuser, who may run tests, is refused nothing."""
    plan.write_text(GOOD, encoding="utf-8")
    real = io.open

    def refusing(file: Any, *rest: Any, **options: Any) -> Any:
        if str(file) == "plan.toml":
            raise PermissionError(13, "Permission denied", str(file))
        return real(file, *rest, **options)

    monkeypatch.setattr(io, "open", refusing)
    assert said_of("plan.toml", said) == "You may not read plan.toml; ask its owner for permission."


# -- --with


WITHS = {
    "no equals sign": ("magnet.field", "--with magnet.field: has no '=': write KEY=VALUE, as magnet.field=350 mT"),
    "misspelt key": ("magnet.feild=1 T", "there is no given 'magnet.feild'; did you mean magnet.field?"),
    "unknown row": ("qubit.Q9.g=2", "there is no given 'qubit.Q9.g'; did you mean qubit.Q1.g?"),
    "result": ("larmor.frequency=1 GHz", "there is no given 'larmor.frequency'"),
    "no key": ("=1 T", "there is no given ''"),
    "control characters": ("a\x1b[31m=1", "--with a\ufffd[31m=1: there is no given 'a\ufffd[31m'"),
}  # fmt: skip


@pytest.mark.parametrize("case", WITHS)
def test_a_malformed_with_is_refused(case: str, plan: Path, said: Callable[..., list[str]]) -> None:
    plan.write_text(GOOD, encoding="utf-8")
    given, sentence = WITHS[case]
    for command in COMMANDS:
        (line,) = said(*command, "plan.toml", "--with", given)
        assert sentence in line


def test_all_errors_of_several_withs_are_said(plan: Path, said: Callable[..., list[str]]) -> None:
    plan.write_text(GOOD, encoding="utf-8")
    changes = ("magnet.field=5", f"x{'y' * 5000}=1", "workload.gates=0")
    lines = said("check", "plan.toml", *(word for change in changes for word in ("--with", change)))
    assert len(lines) == 3
    assert max(map(len, lines)) < 400


def test_withs_are_held_against_each_other_only_when_all_are_in(plan: Path, capsys: pytest.CaptureFixture[str]) -> None:
    plan.write_text(text_of(PLAN), encoding="utf-8")
    low, high = "source.low=20 GHz", "source.high=30 GHz"
    assert cli.main(["check", "plan.toml", "--with", low, "--with", high]) == 1
    assert cli.main(["check", "plan.toml", "--with", high, "--with", low]) == 1
    assert capsys.readouterr().err == ""
    assert cli.main(["check", "plan.toml", "--with", low]) == 2
    assert "source.high: '18 GHz' is not above source.low '20 GHz'" in capsys.readouterr().err


def test_a_slip_of_the_exponent_in_the_half_width_is_refused(plan: Path, said: Callable[..., list[str]]) -> None:
    """It once made a list of every whole MHz within it."""
    plan.write_text(GOOD, encoding="utf-8")
    said("check", "plan.toml", "--with", "source.if_half_width=1e20 Hz")
