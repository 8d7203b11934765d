"""The commands: each reads plans, evaluates them and prints a view. Results go to standard output, messages to standard error."""

from __future__ import annotations

import argparse
import os
import sys
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING

from planner import __version__

if TYPE_CHECKING:
    from planner.planfile import Document

MET, NOT_MET, BAD_INPUT = 0, 1, 2
COMMANDS = ("edit", "check", "report", "words")
WITH_HELP = "evaluate as if this given were typed; never kept; may be repeated"


def main(arguments: Sequence[str] | None = None) -> int:
    """Run one command; the exit status is 0, 1 (some margin short or unknown) or 2 (bad input)."""
    given = list(sys.argv[1:] if arguments is None else arguments)
    parser = _parser()
    if not given:
        parser.print_help()
        return BAD_INPUT
    if given[0] not in COMMANDS and not given[0].startswith("-"):
        given.insert(0, "edit")  # `planner PLAN` is `planner edit PLAN`
    options = parser.parse_args(given)
    try:
        status: int = options.run(options)
        sys.stdout.flush()
        return status
    except BrokenPipeError:  # the reader of our output has gone; nothing is left to say
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return BAD_INPUT
    except KeyboardInterrupt:
        return 130


def edit(options: argparse.Namespace) -> int:
    """Open the editor, or print its first screen where there is no terminal."""
    from planner.tui import terminal

    document = _document(Path(options.plan), options.with_, keep_unknown=True)
    if document is None:
        return BAD_INPUT
    if terminal.usable():
        if options.with_:
            print("--with is evaluated and never kept: use it with check or report, or type the value in the editor",
                  file=sys.stderr)
            return BAD_INPUT
        terminal.set_escape_delay()
        from planner.tui.app import run

        return run(document, mouse=options.mouse)
    from planner.evaluate import evaluate
    from planner.studies.typenext import type_next
    from planner.views.first_screen import first_screen

    evaluation = evaluate(document.plan)
    print("\n".join(first_screen(evaluation, type_next(evaluation))))
    return MET


def check(options: argparse.Namespace) -> int:
    """Print the margins of plans, worst first."""
    from planner.evaluate import evaluate
    from planner.views.report import check_lines

    status = MET
    for position, name in enumerate(options.plans):
        document = _document(Path(name), options.with_)
        if document is None:
            status = BAD_INPUT
            continue
        evaluation = evaluate(document.plan)
        print("\n".join(([""] if position else []) + check_lines(evaluation, name)))
        if evaluation.verdict in {"short", "unknown"}:
            status = max(status, NOT_MET)
    return status


def report(options: argparse.Namespace) -> int:
    """Print all results of a plan."""
    from planner.evaluate import evaluate
    from planner.studies.typenext import type_next
    from planner.views.report import report_json, report_text

    document = _document(Path(options.plan), options.with_)
    if document is None:
        return BAD_INPUT
    evaluation = evaluate(document.plan)
    if options.format == "json":
        print(report_json(evaluation, options.plan))
    else:
        print("\n".join(report_text(evaluation, type_next(evaluation), options.plan)))
    return MET


def words(options: argparse.Namespace) -> int:
    """Print the dictionary, or the entries that contain a text."""
    from planner.views.words import dictionary

    lines = dictionary()
    if options.part:
        found = [index for index, line in enumerate(lines) if options.part in line and not line.startswith(" ")]
        lines = [line for index in found for line in lines[index:index + 2]]
        if not lines:
            print(f"no given, result or margin has '{options.part}' in its name: see 'planner words'", file=sys.stderr)
            return BAD_INPUT
    print("\n".join(lines))
    return MET


def _document(path: Path, changes: Sequence[str], *, keep_unknown: bool = False) -> Document | None:
    """The plan in a file with `--with` applied; None after saying what is wrong with it."""
    from planner.planfile import PlanError, load

    try:
        return _with(load(path, keep_unknown=keep_unknown), changes)
    except PlanError as error:
        print("\n".join(error.sentences), file=sys.stderr)
    return None


def _with(document: Document, changes: Sequence[str]) -> Document:
    from dataclasses import replace

    from planner.plan import UnknownKey, address_of
    from planner.soundness import edited
    from planner.values import GivenError
    from planner.planfile import PlanError

    plan = document.plan
    wrong = []
    for change in changes:
        key, equals, text = change.partition("=")
        try:
            if not equals:
                raise GivenError("has no '=': write KEY=VALUE, as magnet.field=350 mT")
            plan = edited(plan, address_of(plan, key.strip()), text)
        except (GivenError, UnknownKey) as error:
            wrong.append(f"--with {change}: {error}")
    if wrong:
        raise PlanError(wrong)
    return replace(document, plan=plan)


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="planner", formatter_class=argparse.RawDescriptionHelpFormatter, usage="planner [COMMAND] PLAN ...",
        description="Example: planner plans/sq6-03-drafted.toml\n\nPlans one cooldown of a spin-qubit device: edits the plan, "
        "recomputes frequencies,\nclock accuracy and coherence margins on each edit, and says which fall short.")
    parser.add_argument("--version", action="version", version=f"planner {__version__}")
    commands = parser.add_subparsers(title="commands", metavar="COMMAND")
    _edit_parser(commands)
    one = _command(commands, "check", check, "margins of plans, worst first", "planner check plans/*.toml",
                   "Exit status: 0 all asked margins are met, 1 some are short or unknown, 2 bad input.")
    one.add_argument("plans", nargs="+", metavar="PLAN", help="plan files")
    one = _command(commands, "report", report, "all results of a plan", "planner report plans/sq6-03.toml --format json",
                   "JSON holds every given, result and margin in SI units and full precision.")
    one.add_argument("plan", metavar="PLAN", help="plan file")
    one.add_argument("--format", choices=("text", "json"), default="text", help="text (default) or json")
    one = _command(commands, "words", words, "the dictionary of givens, results and margins", "planner words valley",
                   "Without a text it prints every entry.")
    one.add_argument("part", nargs="?", metavar="TEXT", help="only entries whose name contains this")
    return parser


def _edit_parser(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    one = _command(commands, "edit", edit, "open a plan in the editor (the command may be left out)",
                   "planner plans/sq6-03-drafted.toml", "Without a terminal it prints what the first screen shows.")
    one.add_argument("plan", metavar="PLAN", help="plan file")
    one.add_argument("--mouse", action="store_true", help="let the program see the mouse")


def _command(commands: argparse._SubParsersAction[argparse.ArgumentParser], name: str, run: object, summary: str,
             example: str, more: str) -> argparse.ArgumentParser:
    parser: argparse.ArgumentParser = commands.add_parser(
        name, help=summary, formatter_class=argparse.RawDescriptionHelpFormatter,
        description=f"Example: {example}\n\n{summary[0].upper()}{summary[1:]}. {more}")
    parser.set_defaults(run=run)
    if name != "words":
        parser.add_argument("--with", dest="with_", action="append", default=[], metavar="KEY=VALUE", help=WITH_HELP)
    return parser
