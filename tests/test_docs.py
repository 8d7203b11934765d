"""README and DEVELOPERS: what they print is what the program does, what they name exists, and the recipes work."""

from __future__ import annotations

import re
import shlex
import tomllib
from importlib import import_module
from itertools import chain
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from planner import cli, declare, graph, kinds, materials, switches
from planner.evaluate import Evaluation, evaluate
from planner.plan import address_of
from planner.planfile import load, read, text_of
from planner.session import opened, typed
from planner.studies.typenext import type_next
from planner.views.editing import typing_line
from planner.views.first_screen import first_screen, head_lines
from tests.physics import row

ROOT = Path(__file__).parents[1]
README = (ROOT / "README.md").read_text(encoding="utf-8")
DEVELOPERS = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
DEMO = ROOT / "plans" / "sq6-03-drafted.toml"
QUANTITIES = tomllib.loads((ROOT / "tests" / "data" / "quantities.toml").read_text(encoding="utf-8"))


def blocks(text: str, language: str, start: str = "") -> list[str]:
    """The fenced blocks of a language, in order, that begin with `start`."""
    found = re.findall(rf"^```{language}\n(.*?)^```$", text, re.DOTALL | re.MULTILINE)
    return [block for block in found if block.startswith(start)]


def demo() -> Evaluation:
    return evaluate(load(DEMO).plan)


# -- README: commands


def test_the_first_two_sh_blocks_are_the_two_commands_of_the_set_up() -> None:
    first, second = (block.split(" && ") for block in blocks(README, "sh"))
    assert first[0] == second[0] == "python3 -m venv .venv"
    assert first[1:] == [".venv/bin/pip install -q .", f".venv/bin/planner {DEMO.relative_to(ROOT)}\n"]
    assert second[1:] == [".venv/bin/pip install -q -e '.[test]'", ".venv/bin/python -m pytest -q -n auto\n"]


LINES = [line for block in blocks(README, "console") for line in block.splitlines() if line.startswith("$ planner")]


@pytest.mark.parametrize("line", LINES)
def test_a_printed_command_ends_with_the_status_beside_it(
    line: str, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    command, _, status = line.removeprefix("$ planner ").partition("# status ")
    output = run(command, int(status), monkeypatch, capsys)
    assert output.out if status != "2" else output.err.count("\n") == 1


def run(command: str, status: int, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> Any:
    """What a command prints, with the stated status; file patterns as a shell reads them."""
    monkeypatch.chdir(ROOT)
    words = [sorted(map(str, Path().glob(word))) if "*" in word else [word] for word in shlex.split(command)]
    assert cli.main([*chain.from_iterable(words)]) == status
    return capsys.readouterr()


def test_there_are_commands_to_run() -> None:
    assert {line.split()[2] for line in LINES} | {"edit"} == set(cli.COMMANDS)


def test_the_table_of_commands_is_complete() -> None:
    rows = [line for line in README.splitlines() if line.startswith("| `planner")]
    assert {name for line in rows for name in re.findall(r"`planner ([a-z]+) ", line)} == set(cli.COMMANDS)


def test_the_refusal_in_the_text_is_the_one_that_is_printed(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    output = run('check plans/sq6-03.toml --with "magnet.field=350 rad"', 2, monkeypatch, capsys)
    assert f"`{output.err.strip()}`" in README


# -- README: the editor


def test_the_first_screen_is_the_programs() -> None:
    (block,) = blocks(README, "text", "SQ6-03")
    shown, evaluation = block.splitlines(), demo()
    following = type_next(evaluation)
    assert shown[:3] == [line.rstrip() for line in head_lines(evaluation, following, "saved", 80)]
    assert len(shown) == 24
    assert max(map(len, shown)) == 80
    printed = first_screen(evaluation, following)
    for name in evaluation.names:
        line, wanted = (next(line for line in lines if line.split()[:1] == [name]) for lines in (shown, printed))
        assert line.split()[: len(wanted.split())] == wanted.split()


def test_the_first_edit_says_and_changes_what_the_text_shows() -> None:
    document, evaluation = load(DEMO), demo()
    address = address_of(document.plan, "magnet.field")
    assert f"`{typing_line(evaluation, address, '350')[0]}`" in README
    session = typed(opened(document), address, "350")
    text, in_house_form = text_of(document, session.plan)
    assert not in_house_form
    before, after = (set(lines.splitlines()) for lines in (document.text, text))
    (block,) = blocks(README, "diff")
    changed = [line for line in block.splitlines() if line[0] != " "]
    assert changed == [f"-{line}" for line in before - after] + [f"+{line}" for line in after - before]
    assert "short" not in {margin.verdict for margin in evaluate(session.plan).margins}


# -- README: quantities and the plan file


def test_the_examples_of_the_grammar_are_accepted() -> None:
    (block,) = blocks(README, "text", "650 mT")
    by_name = {kind.name: kind for kind in kinds.KINDS}
    accepted = {entry["text"] for entry in QUANTITIES["accepted"]}
    examples = [re.split(r" {2,}", line)[:2] for line in block.splitlines()]
    assert len(examples) == 10
    for text, kind in examples:
        assert kinds.parse(by_name[kind], text, sizes=(1, 3)).text == text
        assert text in accepted


def test_the_smallest_plan_is_the_shipped_one() -> None:
    (block,) = blocks(README, "toml")
    assert block == (ROOT / "plans" / "minimal.toml").read_text(encoding="utf-8")
    read(block, "README.md")


# -- DEVELOPERS


def test_the_map_names_every_module_and_nothing_else() -> None:
    (block,) = blocks(DEVELOPERS, "text", "planner/")
    named = [line.split()[0] for line in block.splitlines()]
    missing = [path for path in named if not (ROOT / path).exists()]
    files = [path for path in (ROOT / "planner").rglob("*.*") if path.suffix in {".py", ".toml", ".tcss"}]
    modules = {str(path.relative_to(ROOT)) for path in files if path.name != "__init__.py"}
    assert missing == []
    assert modules - set(named) == set()


@pytest.mark.parametrize("text", [README, DEVELOPERS], ids=["README", "DEVELOPERS"])
def test_files_named_in_the_text_exist(text: str) -> None:
    named = set(re.findall(r"`((?:planner|tests|plans|\.ci)/[\w./-]*|\w+\.(?:toml|md))`", text))
    known = [ROOT, ROOT / "planner" / "data"]
    assert {name for name in named if not any((folder / name).exists() for folder in known)} == set()


def test_the_layers_in_the_text_are_those_of_the_contract() -> None:
    project = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))
    (contract,) = (one for one in project["tool"]["importlinter"]["contracts"] if one["type"] == "layers")
    layers = [name.removeprefix("planner.") for layer in contract["layers"] for name in layer.split(" | ")]
    text = DEVELOPERS.partition("Imports go down only: ")[2].partition(". The contract")[0]
    assert re.findall(r"\w+", re.sub(r"\b(then|and)\b", "", text)) == [name for name in layers if name != "data"]


def recipes() -> dict[str, str]:
    """The pieces of the recipes, by the line above each that says where it goes."""
    text = "\n".join(blocks(DEVELOPERS, "python") + blocks(DEVELOPERS, "toml"))
    pieces = re.split(r"^# ((?:planner|tests)/.*)\n", text, flags=re.MULTILINE)[1:]
    return dict(zip(pieces[::2], pieces[1::2], strict=True))


def names_in(place: str, **more: Any) -> dict[str, Any]:
    """What a piece for this module may name: the module's own names, and the declarations that it would import."""
    module = import_module(place.partition(".py")[0].replace("/", "."))
    return {**vars(declare), **vars(kinds), **vars(switches), **vars(module), "np": np, "row": row, **more}


def defined(place: str, **more: Any) -> dict[str, Any]:
    """What a piece defines in its module."""
    scope: dict[str, Any] = {}
    exec(recipes()[place], names_in(place, **more), scope)
    return scope


@pytest.fixture
def heated(monkeypatch: pytest.MonkeyPatch) -> None:
    """The givens and the law of the example, as if they were shipped."""
    qubit = defined("planner/chapters/qubit.py, in class Qubit")["heating_shift"]
    workload = defined("planner/chapters/workload.py, in class Workload")["duty_change"]
    added = {"qubit.heating_shift": qubit.metadata["given"], "workload.duty_change": workload.metadata["given"]}
    extended = graph.givens() | added
    monkeypatch.setattr(graph, "givens", lambda: extended)
    law = defined("planner/physics/noise.py")["heating_noise"]
    monkeypatch.setattr(import_module("planner.physics.noise"), "heating_noise", law, raising=False)


@pytest.mark.usefixtures("heated")
def test_the_recipes_of_a_given_a_law_a_result_and_a_margin_fit_together() -> None:
    chapter = "planner/chapters/noise.py"
    derived = eval(recipes()[f"{chapter}, in DERIVEDS"], names_in(chapter))
    limit = eval(recipes()[f"{chapter}, in LIMITS"], names_in(chapter, **defined("planner/switches.py")))
    built = graph.build((*graph.DERIVEDS, derived), (*graph.LIMITS, limit))
    assert "workload.duty_change" in built.upstream[derived.key]
    assert eval("{" + recipes()[f"{chapter}, in noise.static"] + "}") == {"heating": derived.key}


@pytest.mark.usefixtures("heated")
def test_the_recipe_of_a_test_passes() -> None:
    noise = import_module("planner.physics.noise")
    names = names_in("planner/physics/noise.py", noise=noise)
    exec(recipes()["tests/physics/test_noise.py"], names)
    names["test_a_shift_by_heat_grows_with_the_change_of_duty"]()


def test_the_recipe_of_a_material_is_a_material(monkeypatch: pytest.MonkeyPatch) -> None:
    added = tomllib.loads(recipes()["planner/data/materials.toml"])["material"]
    shipped = materials._table()
    monkeypatch.setattr(materials, "_table", lambda: {**shipped, "material": shipped["material"] | added})
    made = materials.material.__wrapped__("si-mos-50ppm")
    value = made.values["model.spinful_fraction"]
    assert [kinds.parse(kinds.FRACTION, str(text)).value for text in (value.low, value.text, value.high)] == [
        50e-6, 50e-6, 60e-6,
    ]  # fmt: skip
    assert made.values["model.nuclei"] == materials.material("si-mos-natural").values["model.nuclei"]
