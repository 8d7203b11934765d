"""The commands: what they print, where they print it, and their exit status."""

from __future__ import annotations

import hashlib
import json
import os
import signal
import subprocess
import sys
from collections.abc import Sequence
from pathlib import Path
from typing import Any

import pytest

from planner import __version__, cli
from planner.graph import givens, graph
from planner.margins import VERDICTS
from planner.materials import edition
from planner.plan import ROWS, SECTIONS, table_givens
from planner.tui import app as editor
from planner.tui import terminal
from tests.planmaking import BENCH, Entry, text_of

ROOT = Path(__file__).parents[1]
PLANS = ROOT / "plans"
CLEAR, TIGHT, SHORT, UNKNOWN = ("gh4-11", "sq6-03", "sq6-03-drafted", "minimal")


def plan(name: str) -> str:
    return str(PLANS / f"{name}.toml")


class Output:
    """What a command in this process printed, and its exit status."""

    def __init__(self, capsys: pytest.CaptureFixture[str], arguments: Sequence[str]) -> None:
        try:
            self.status = cli.main(arguments)
        except SystemExit as end:  # the argument parser ends by itself
            assert isinstance(end.code, int)
            self.status = end.code
        self.out, self.err = capsys.readouterr()
        self.lines = self.out.splitlines()


@pytest.fixture
def run(capsys: pytest.CaptureFixture[str]) -> Any:
    return lambda *arguments: Output(capsys, arguments)


def process(*arguments: str, **options: Any) -> subprocess.CompletedProcess[bytes]:
    """The command as a process of its own, without a terminal."""
    return subprocess.run(
        [sys.executable, "-m", "planner", *arguments],
        cwd=ROOT, stdin=subprocess.DEVNULL, timeout=60, check=False,
        **{"stdout": subprocess.PIPE, "stderr": subprocess.PIPE, **options},
    )  # fmt: skip


# -- check


@pytest.mark.parametrize(("name", "verdict", "status"), [
    (CLEAR, "tight", 0), (TIGHT, "tight", 0), (SHORT, "short", 1), (UNKNOWN, "unknown", 1),
])  # fmt: skip
def test_check_ends_by_its_worst_verdict(run: Any, name: str, verdict: str, status: int) -> None:
    output = run("check", plan(name))
    assert (output.status, output.err) == (status, "")
    assert output.lines[0] == f"{plan(name)}: {verdict}"


def test_check_shows_margins_worst_first_and_what_is_not_asked(run: Any) -> None:
    lines = run("check", plan(SHORT)).lines
    assert lines[1].split() == ["margin", "of", "until"]
    assert lines[2].split()[:4] == ["valley", "Q4", "0.34", "short"]
    assert lines[-1] == "not asked: pair (no pairs), loose-clock (everything is locked)"
    verdicts = [next(word for word in line.split() if word in VERDICTS) for line in lines[2:-1]]
    order = ["short", "unknown", "tight", "clear"]
    assert verdicts == sorted(verdicts, key=order.index)


def test_check_of_several_plans_ends_by_the_worst(run: Any, tmp_path: Path) -> None:
    output = run("check", plan(CLEAR), plan(UNKNOWN))
    assert output.status == 1
    assert output.out == "\n".join(run("check", plan(name)).out for name in (CLEAR, UNKNOWN))
    bad = tmp_path / "bad.toml"
    bad.write_text("format = 1", encoding="utf-8")
    assert run("check", str(bad), plan(SHORT)).status == run("check", plan(SHORT), str(bad)).status == 2
    assert run("check", plan(SHORT), plan(CLEAR)).status == 1
    output = run("check", str(bad), plan(CLEAR))
    assert output.status == 2
    assert output.lines[0] == f"{plan(CLEAR)}: tight"
    assert output.err.startswith(f"{bad}: magnet.field: is required")


def test_with_is_evaluated_and_not_kept(run: Any) -> None:
    before = Path(plan(SHORT)).read_bytes()
    assert run("check", plan(SHORT)).status == 1
    output = run("check", plan(SHORT), "--with", "magnet.field=350 mT", "--with", "title=another")
    assert output.status == 0
    assert run("check", plan(SHORT), "--with", "magnet.field = 350 mT").out == output.out
    assert Path(plan(SHORT)).read_bytes() == before


def test_an_empty_with_takes_a_given_out(run: Any) -> None:
    output = run("check", plan(CLEAR), "--with", "source.low=")
    assert output.status == 1
    assert "source.low is not typed" in output.out


# -- edit


def test_without_a_terminal_edit_prints_the_first_screen(run: Any) -> None:
    output = run("edit", plan(SHORT))
    assert (output.status, output.err) == (0, "")
    assert run(plan(SHORT)).out == output.out
    assert output.lines[0].startswith("SQ6-03, cooldown 14")
    assert output.lines[2].startswith("valley Q4 0.34 short: gap 2.74 of 8 ueV")
    assert max(map(len, output.lines)) <= 80
    assert [line.split()[0] for line in output.lines if line.startswith("Q")] == ["Q1", "Q2", "Q3", "Q4", "Q5", "Q6"]


def test_options_may_stand_before_the_plan(run: Any) -> None:
    changed = run("--with", "magnet.field=350 mT", plan(SHORT))
    assert (changed.status, changed.err) == (0, "")
    assert changed.out == run("edit", plan(SHORT), "--with", "magnet.field=350 mT").out != run(plan(SHORT)).out


def test_keys_that_do_not_count_are_said_and_the_plan_is_shown(run: Any, tmp_path: Path) -> None:
    path = tmp_path / "plan.toml"
    path.write_text(text_of({**BENCH, "magnet.colour": "red"}), encoding="utf-8")
    output = run(str(path))
    assert output.status == 0
    assert output.err.startswith(f"{path}:")
    assert output.err.endswith("the line is kept and does not count\n")
    assert "magnet.colour" in output.err
    assert run("check", str(path)).status == 2


def test_in_a_terminal_the_editor_opens(run: Any, monkeypatch: pytest.MonkeyPatch) -> None:
    opened: list[tuple[Any, bool]] = []
    monkeypatch.setattr(terminal, "usable", lambda: True)
    monkeypatch.setattr(terminal, "prepare_environment", lambda: None)
    monkeypatch.setattr(editor, "run", lambda document, *, mouse: opened.append((document.path, mouse)) or 0)
    assert run(plan(SHORT)).status == run("edit", "--mouse", plan(SHORT)).status == 0
    assert opened == [(Path(plan(SHORT)), False), (Path(plan(SHORT)), True)]
    output = run(plan(SHORT), "--with", "magnet.field=1 T")
    assert output.status == 2
    assert output.err.startswith("--with is evaluated and never kept: use it with check or report")
    assert len(opened) == 2


# -- report

TOP = ["planner", "format", "edition", "hash", "plan", "givens", "results", "margins", "not_asked", "verdict"]
GIVEN = ["text", "value", "tolerance", "unit", "origin", "from"]
MARGIN = ["name", "worst", "allowed", "expected", "unit", "margin", "low", "high", "verdict", "until", "why"]


def refuse(constant: str) -> None:
    raise AssertionError(f"{constant} is no JSON")


def document(run: Any, *arguments: str) -> Any:
    """The report of a plan, read by a strict reader."""
    output = run("report", *arguments, "--format", "json")
    assert (output.status, output.err) == (0, "")
    return json.loads(output.out, parse_constant=refuse)


@pytest.mark.parametrize("name", [CLEAR, TIGHT, SHORT, UNKNOWN])
def test_the_json_report_has_the_keys_of_the_contract(run: Any, name: str) -> None:
    found = document(run, plan(name))
    assert list(found) == TOP
    assert (found["planner"], found["format"], found["edition"]) == (__version__, 1, edition())
    assert found["plan"] == plan(name)
    for given in found["givens"].values():
        shown = {*GIVEN} if "values" not in given else {*GIVEN, "values"} - {"value"}
        assert {*given} - {"why"} == shown
        assert given["from"] in {"typed", "all_qubits", "material", "default"}
    for result in found["results"].values():
        assert {*result} - {"why"} in ({"unit", "value"}, {"unit", "values"})
        values = result["values"].values() if "values" in result else [result["value"]]
        assert ("why" in result) == (None in values)
    assert all(list(margin) == MARGIN for margin in found["margins"])
    assert all(margin["verdict"] in {"short", "unknown", "tight", "clear"} for margin in found["margins"])
    assert not {*found["givens"]} & {*found["results"]}


def test_the_json_report_is_in_si_units_and_full_precision(run: Any) -> None:
    found = document(run, plan(TIGHT))
    field = found["givens"]["magnet.field"]
    assert field == {"text": "350 mT", "value": 0.35, "tolerance": None, "unit": "T", "origin": "", "from": "typed"}
    assert found["givens"]["qubit.Q1.rabi_frequency"]["from"] == "all_qubits"
    frequency = found["results"]["larmor.frequency"]
    assert frequency["unit"] == "Hz"
    assert list(frequency["values"]) == ["Q1", "Q2", "Q3", "Q4", "Q5", "Q6"]
    assert frequency["values"]["Q1"] == pytest.approx(13.9e9, rel=0.01)  # 2.00 muB (350 + 146 mT) / h, from memory
    assert len(repr(frequency["values"]["Q1"])) > 12
    assert found["not_asked"]["loose-clock"] == "everything is locked"


def test_unknown_is_null_with_its_reason(run: Any) -> None:
    found = document(run, plan(UNKNOWN))
    stands = found["results"]["coherence.allowed_noise"]
    assert stands["values"] == {"Q1": None}
    assert list(stands["why"]) == ["Q1"]
    assert stands["why"]["Q1"].endswith("rabi_frequency is not typed")
    unknown = [margin for margin in found["margins"] if margin["margin"] is None]
    assert {margin["verdict"] for margin in unknown} == {"unknown"}
    assert all(margin["why"] for margin in unknown)


def hash_of(found: Any) -> str:
    """The hash as the contract defines it, from the report itself."""

    def exact(value: Any) -> Any:
        return tuple(value) if isinstance(value, list) else value

    resolved = {key: given for key, given in found["givens"].items() if given["text"] is not None}
    lines = [f"{key}={(exact(given['value']), exact(given['tolerance']))!r}" for key, given in resolved.items()]
    text = "\n".join([*sorted(lines), f"edition={found['edition']!r}"])
    return hashlib.sha256(text.encode()).hexdigest()[:16]


@pytest.mark.parametrize("name", [CLEAR, SHORT, UNKNOWN])
def test_the_hash_is_that_of_the_contract(run: Any, name: str) -> None:
    found = document(run, plan(name))
    assert found["hash"] == hash_of(found)


def test_the_hash_moves_with_a_given_and_not_with_a_comment(run: Any, tmp_path: Path) -> None:
    path = tmp_path / "plan.toml"

    def hash_after(text: str, *changes: str) -> str:
        path.write_text(text, encoding="utf-8")
        return str(document(run, str(path), *changes)["hash"])

    text = Path(plan(SHORT)).read_text(encoding="utf-8")
    first = hash_after(text)
    assert first == document(run, plan(SHORT))["hash"]
    assert hash_after("# hello\n" + text.replace("\n\n", "\n\n\n")) == first
    assert hash_after(text.replace('"420 mT"', '"0.42 T"')) == first  # the same field
    assert hash_after(text.replace('"420 mT"', '"421 mT"')) != first
    assert hash_after(text.replace('"420 mT"', '"420 ± 1 mT"')) != first
    assert (
        hash_after(text, "--with", "magnet.field=421 mT") == hash_after(text.replace('"420 mT"', '"421 mT"')) != first
    )
    assert hash_after(text, "--with", "magnet.settle_slope=13 ppm/h") != first


def test_the_text_report_begins_with_plan_hash_and_edition_and_is_stable(run: Any) -> None:
    output = run("report", plan(SHORT))
    assert (output.status, output.err) == (0, "")
    assert output.lines[:2] == [
        f"plan {plan(SHORT)}",
        f"hash {document(run, plan(SHORT))['hash']}, edition {edition()}",
    ]
    assert run("report", plan(SHORT)).out == output.out
    rowless = {"pair"}  # the demo has no pairs
    shown = [
        derived.key
        for derived in graph().order
        if derived.shown and derived.key not in givens() and derived.per.value not in rowless
    ]
    assert [key for key in shown if key not in output.out] == []


# -- words


def test_words_knows_every_given_result_and_margin(run: Any) -> None:
    output = run("words")
    assert (output.status, output.err) == (0, "")
    heads = [line.split("  ")[0] for line in output.lines]
    tables = [table for table in (*SECTIONS, *ROWS) if table != "all_qubits"]
    rows = {table: f"{table}.NAME." if table in ROWS else f"{table}." for table in tables if table}
    wanted = [rows.get(table, "") + name for table in tables for name in table_givens(table)]
    wanted += [derived.key for derived in graph().order if derived.shown and derived.key not in givens()]
    wanted += [limit.name for limit in graph().limits]
    assert [key for key in wanted if heads.count(key) != 1] == []
    entries = [index for index, head in enumerate(heads) if head in wanted]
    assert all(output.lines[index + 1].startswith("    ") and output.lines[index + 1].strip() for index in entries)


def test_words_of_a_text_are_the_entries_with_it(run: Any) -> None:
    output = run("words", "VALLEY")
    heads = [line.split("  ")[0] for line in output.lines[::2]]
    assert {"qubit.NAME.valley_splitting", "workload.valley_window", "valley.distance", "valley"} <= {*heads}
    assert all("valley" in head for head in heads)
    nothing = run("words", "no\x1bsuch")
    assert (nothing.status, nothing.out) == (2, "")
    assert nothing.err == "no given, result or margin has 'no\ufffdsuch' in its name: see 'planner words'\n"


# -- help, wrong commands


def test_without_arguments_help_is_printed_with_status_2(run: Any) -> None:
    output = run()
    assert output.status == 2
    assert output.out == run("--help").out


@pytest.mark.parametrize("command", [[], ["edit"], ["check"], ["report"], ["words"]])
def test_help_begins_with_an_example_that_works(run: Any, command: list[str], monkeypatch: pytest.MonkeyPatch) -> None:
    output = run(*command, "--help")
    assert output.status == 0
    program, *example = output.lines[0].removeprefix("Example: ").split()
    assert (output.lines[0].startswith("Example: "), program) == (True, "planner")
    assert f"usage: planner {command[0] if command else '[COMMAND]'} " in output.out
    monkeypatch.chdir(ROOT)
    words = [word for part in example for word in (sorted(map(str, Path().glob(part))) if "*" in part else [part])]
    assert run(*words).status in {0, 1}


def test_help_names_every_command(run: Any) -> None:
    output = run("--help").out
    assert all(f"\n    {command} " in output for command in cli.COMMANDS)


def test_version(run: Any) -> None:
    assert run("--version").out == f"planner {__version__}\n"


@pytest.mark.parametrize("arguments", [["check"], ["report", "a", "b"], ["report", "a", "--format", "word"], ["edit"],
    ["words", "a", "b"], ["--loud"], ["check", "--loud", "a"]])  # fmt: skip
def test_wrong_arguments_are_said_on_standard_error(run: Any, arguments: list[str]) -> None:
    output = run(*arguments)
    assert (output.status, output.out) == (2, "")
    assert "planner" in output.err
    assert "error: " in output.err


def test_a_misspelt_command_is_no_plan(run: Any, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    output = run("chekc", plan(CLEAR))
    assert output.status == 2
    assert output.err == "there is no file and no command 'chekc'; did you mean check?\n"
    Path("chekc").write_bytes(Path(plan(CLEAR)).read_bytes())
    assert run("chekc").status == 0


# -- why


def test_why_explains_a_result_of_a_qubit_and_a_margin(run: Any) -> None:
    output = run("why", plan(SHORT), "larmor.frequency", "--qubit", "Q3")
    assert (output.status, output.err) == (0, "")
    assert output.lines[0].startswith("Larmor frequency: larmor.frequency of Q3 = 16.114 GHz")
    margin = run("why", plan(SHORT), "valley")
    assert margin.status == 0
    assert "  valley Q4 0.34 short: gap 2.74 of 8 ueV." in margin.lines
    row = run("why", plan(SHORT), "stage.temperature", "--qubit", "still")
    assert row.lines[0] == "Working temperature: stage.temperature of still = 0.85 K."


def test_why_answers_for_a_change_that_is_not_kept(run: Any) -> None:
    output = run("why", plan(SHORT), "magnet.field", "--with", "magnet.field=350 mT; guess")
    assert output.lines[0].endswith("magnet.field = 350 mT.")
    assert output.lines[1] == "  origin: typed; guess"


@pytest.mark.parametrize(("arguments", "sentence"), [
    (["larmor.frequenzy"], "there is no given, result or margin 'larmor.frequenzy'; did you mean larmor.frequency?"),
    (["wait", "--qubit", "middle"], "there is no qubit 'middle': there are Q1, Q2, Q3, Q4, Q5, Q6"),
    (["wait", "--with", "magnet.field=1 parsec"], "--with magnet.field=1 parsec: 'parsec' is not a unit of field"),
])  # fmt: skip
def test_why_refuses_what_is_not_there(run: Any, arguments: list[str], sentence: str) -> None:
    output = run("why", plan(SHORT), *arguments)
    assert (output.status, output.out) == (2, "")
    assert output.err.startswith(sentence)


# -- as a process


def test_piped_output_is_plain_and_the_same_as_in_this_process(run: Any) -> None:
    for command, status in ((["report"], 0), (["edit"], 0), (["check"], 1)):
        finished = process(
            *command, plan(SHORT), env={**os.environ, "TERM": "xterm-256color", "COLORTERM": "truecolor"}
        )
        assert (finished.returncode, finished.stderr) == (status, b"")
        assert b"\x1b" not in finished.stdout
        assert finished.stdout.decode() == run(*command, plan(SHORT)).out


def test_check_and_help_load_neither_the_terminal_framework_nor_pint() -> None:
    program = (
        "import sys\nfrom planner.cli import main\n"
        "try:\n    main(sys.argv[1:])\nexcept SystemExit:\n    pass\n"
        "print(sorted({'textual', 'rich', 'pint'} & {*sys.modules}), file=sys.stderr)"
    )
    plans = [plan(name) for name in (CLEAR, TIGHT, SHORT, UNKNOWN)]
    for arguments in (["check", *plans], ["--help"], ["report", plan(SHORT)]):
        command = [sys.executable, "-c", program, *arguments]
        finished = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, timeout=60, check=True)
        assert finished.stderr == "[]\n"


def test_a_reader_that_has_gone_ends_a_command_without_a_word() -> None:
    reading, writing = os.pipe()
    os.close(reading)
    with os.fdopen(writing, "wb") as nobody:
        finished = process("report", plan(SHORT), stdout=nobody)
    assert (finished.returncode, finished.stderr) == (128 + signal.SIGPIPE, b"")


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="this system has no disk that is always full")
def test_a_full_disk_is_said() -> None:
    with Path("/dev/full").open("wb") as full:
        finished = process("report", plan(SHORT), stdout=full)
    assert finished.returncode == 2
    assert finished.stderr == b"the output was not written: its disk is full; free some space or send it elsewhere\n"


def test_characters_that_the_output_has_not_are_replaced(tmp_path: Path) -> None:
    givens_of_plan: dict[str, Entry] = {**BENCH, "device": "温度 ± µ"}
    path = tmp_path / "plan.toml"
    path.write_text(text_of(givens_of_plan), encoding="utf-8")
    for command in (["report", "--format", "json"], ["report"], ["edit"]):
        finished = process(*command, str(path), env={**os.environ, "PYTHONIOENCODING": "ascii"})
        assert (finished.returncode, finished.stderr) == (0, b"")
        assert b"?? ? ?" in finished.stdout


def test_a_name_that_is_no_text_is_shown_and_read(tmp_path: Path) -> None:
    path = os.fsencode(tmp_path) + b"/\xff\x1b[31m.toml"
    Path(os.fsdecode(path)).write_text(text_of(BENCH), encoding="utf-8")
    finished = process("check", os.fsdecode(path))
    assert (finished.returncode in {0, 1}, finished.stderr) == (True, b"")
    assert b"\x1b" not in finished.stdout
    verdict = json.loads(process("report", os.fsdecode(path), "--format", "json").stdout)["verdict"]
    assert f"/\ufffd\ufffd[31m.toml: {verdict}\n" in finished.stdout.decode()
