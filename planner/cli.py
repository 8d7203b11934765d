"""The commands: each reads plans, evaluates them and prints a view.

Results go to standard output, messages to standard error.
"""

from __future__ import annotations

import argparse
import errno
import io
import os
import signal
import sys
from collections.abc import Sequence
from itertools import pairwise
from pathlib import Path
from typing import TYPE_CHECKING

from planner import __version__

if TYPE_CHECKING:
    from planner.planfile import Document

MET, NOT_MET, BAD_INPUT = 0, 1, 2
KILLED = 128  # plus the number of a signal, as shells say it
OF_THE_PROGRAM = ("-h", "--help", "--version")
COMMANDS = ("edit", "check", "report", "why", "words")
LONGEST_SHOWN = 120  # characters of an argument that a message repeats
WITH_HELP = "evaluate as if this given were typed; never kept; may be repeated"


def main(arguments: Sequence[str] | None = None) -> int:
    """Run one command; the exit status is 0, 1 (some margin short or unknown) or 2 (bad input)."""
    given = list(sys.argv[1:] if arguments is None else arguments)
    parser = _parser()
    if not given:
        parser.print_help()
        return BAD_INPUT
    if given[0] not in (*COMMANDS, *OF_THE_PROGRAM):
        if _is_misspelt(given[0]):
            return BAD_INPUT
        given.insert(0, "edit")  # `planner PLAN` is `planner edit PLAN`
    options = parser.parse_args(given)
    if isinstance(sys.stdout, io.TextIOWrapper):
        sys.stdout.reconfigure(errors="replace")  # a name that the terminal has no characters for ends no command
    try:
        status: int = options.run(options)
        sys.stdout.flush()
    except OSError as error:
        return _without_output(error)
    except KeyboardInterrupt:
        return KILLED + signal.SIGINT
    return status


def _without_output(error: OSError) -> int:
    """The exit status where the output can't be written: its reader has gone, which needs no word, or its disk is full.

    What else an OSError says is a bug and is raised again: reading and saving turn theirs into sentences.
    """
    if not isinstance(error, BrokenPipeError) and error.errno != errno.ENOSPC:
        raise error
    os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())  # or Python's last flush would say it again
    if isinstance(error, BrokenPipeError):
        return KILLED + signal.SIGPIPE
    print("the output was not written: its disk is full; free some space or send it elsewhere", file=sys.stderr)
    return BAD_INPUT


def _is_misspelt(word: str) -> bool:
    """Whether a word is no file and nearly a command; then it says so."""
    from planner.values import nearest

    hint = nearest(word, list(COMMANDS))
    if hint and not os.path.lexists(word):
        print(f"there is no file and no command '{_shown(word)}'{hint}", file=sys.stderr)
        return True
    return False


def edit(options: argparse.Namespace) -> int:
    """Open the editor, or print its first screen where there is no terminal."""
    from planner.tui import terminal

    document = _document(Path(options.plan), options.with_, keep_unknown=True)
    if document is None:
        return BAD_INPUT
    if terminal.usable():
        if options.with_:
            print(
                "--with is evaluated and never kept: use it with check or report, or type the value in the editor",
                file=sys.stderr,
            )
            return BAD_INPUT
        terminal.prepare_environment()
        from planner.tui.app import run

        return run(document, mouse=options.mouse)
    from planner.evaluate import evaluate
    from planner.studies.typenext import type_next
    from planner.views.first_screen import first_screen

    print("".join(f"{note}\n" for note in document.ignored), end="", file=sys.stderr)
    evaluation = evaluate(document.plan)
    print("\n".join(first_screen(evaluation, type_next(evaluation))))
    return MET


def check(options: argparse.Namespace) -> int:
    """Print the margins of plans, worst first."""
    from planner.evaluate import evaluate
    from planner.views.report import check_lines

    status, printed = MET, False
    for name in options.plans:
        document = _document(Path(name), options.with_)
        if document is None:
            status = BAD_INPUT
            continue
        evaluation = evaluate(document.plan)
        print("\n".join(([""] if printed else []) + check_lines(evaluation, _shown(name))))
        printed = True
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
        print("\n".join(report_text(evaluation, type_next(evaluation), _shown(options.plan))))
    return MET


def why(options: argparse.Namespace) -> int:
    """Print why a given, result or margin is what it is."""
    from planner.evaluate import evaluate
    from planner.plan import UnknownKey
    from planner.views.why import explanation

    document = _document(Path(options.plan), options.with_)
    if document is None:
        return BAD_INPUT
    try:
        lines = explanation(evaluate(document.plan), options.key, options.row)
    except UnknownKey as error:
        print(error, file=sys.stderr)
        return BAD_INPUT
    print("\n".join(lines))
    return MET


def words(options: argparse.Namespace) -> int:
    """Print the dictionary, or the entries that contain a text."""
    from planner.views.words import dictionary

    lines = dictionary()
    if options.part:
        entries = [(line, meaning) for line, meaning in pairwise(lines) if meaning.startswith(" ")]
        lines = [each for entry in entries if options.part.lower() in entry[0].lower() for each in entry]
        if not lines:
            print(
                f"no given, result or margin has '{_shown(options.part)}' in its name: see 'planner words'",
                file=sys.stderr,
            )
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
    from planner.planfile import PlanError
    from planner.soundness import entered, refuse_new_problems
    from planner.values import GivenError

    plan = document.plan
    wrong = []
    for change in changes:
        key, equals, text = change.partition("=")
        try:
            if not equals:
                raise GivenError("has no '=': write KEY=VALUE, as magnet.field=350 mT")
            plan = entered(plan, address_of(plan, key.strip()), text)
        except (GivenError, UnknownKey) as error:
            wrong.append(f"--with {_shown(change)}: {error}")
    try:  # held against each other only when all are in: two may fit together and neither alone
        refuse_new_problems(document.plan, plan)
    except GivenError as error:
        wrong.append(f"--with {', '.join(map(_shown, changes))}: {error}")
    if wrong:
        raise PlanError(wrong)
    return replace(document, plan=plan)


def _shown(argument: str) -> str:
    """An argument as a message repeats it: nothing in it acts on the terminal."""
    from planner.kinds import clean

    return clean(argument if len(argument) <= LONGEST_SHOWN else argument[:LONGEST_SHOWN] + "...")


class _Parser(argparse.ArgumentParser):
    """A parser whose help begins with an example."""

    example = ""

    def format_help(self) -> str:
        return f"Example: {self.example}\n\n{super().format_help()}"


def _parser() -> _Parser:
    parser = _Parser(
        prog="planner",
        formatter_class=argparse.RawDescriptionHelpFormatter,
        usage="planner [COMMAND] PLAN ...",
        description="Plans one cooldown of a spin-qubit device: edits the plan, recomputes frequencies,\n"
        "clock accuracy and coherence margins on each edit, and says which fall short.",
    )
    parser.example = "planner plans/sq6-03-drafted.toml"
    parser.add_argument("--version", action="version", version=f"planner {__version__}")
    commands = parser.add_subparsers(title="commands", metavar="COMMAND", prog="planner")
    _edit_parser(commands)
    one = _command(
        commands,
        "check",
        check,
        "margins of plans, worst first",
        "planner check plans/*.toml",
        "Exit status: 0 all asked margins are met, 1 some are short or unknown, 2 bad input.",
    )
    one.add_argument("plans", nargs="+", metavar="PLAN", help="plan files")
    one = _command(
        commands,
        "report",
        report,
        "all results of a plan",
        "planner report plans/sq6-03.toml --format json",
        "JSON holds every given, result and margin in SI units and full precision.",
    )
    one.add_argument("plan", metavar="PLAN", help="plan file")
    one.add_argument("--format", choices=("text", "json"), default="text", help="text (default) or json")
    one = _command(
        commands,
        "why",
        why,
        "why a number is what it is: law, source, what went in",
        "planner why plans/sq6-03.toml valley.distance --qubit Q4",
        "KEY is a given, a result or the name of a margin, as 'planner words' lists them.",
    )
    one.add_argument("plan", metavar="PLAN", help="plan file")
    one.add_argument("key", metavar="KEY", help="a given, a result or a margin")
    one.add_argument(
        "--qubit",
        dest="row",
        default="",
        metavar="NAME",
        help="the qubit (or row of another table) it is asked for; without it a margin's worst, else the first",
    )
    one = _command(
        commands,
        "words",
        words,
        "the dictionary of givens, results and margins",
        "planner words valley",
        "Without a text it prints every entry.",
    )
    one.add_argument("part", nargs="?", metavar="TEXT", help="only entries whose name contains this")
    return parser


def _edit_parser(commands: argparse._SubParsersAction[_Parser]) -> None:
    one = _command(
        commands,
        "edit",
        edit,
        "open a plan in the editor (the command may be left out)",
        "planner plans/sq6-03-drafted.toml",
        "Without a terminal it prints what the first screen shows.",
    )
    one.add_argument("plan", metavar="PLAN", help="plan file")
    one.add_argument("--mouse", action="store_true", help="let the program see the mouse")


def _command(
    commands: argparse._SubParsersAction[_Parser], name: str, run: object, summary: str, example: str, more: str
) -> argparse.ArgumentParser:
    parser = commands.add_parser(
        name,
        help=summary,
        formatter_class=argparse.RawDescriptionHelpFormatter,
        description=f"{summary[0].upper()}{summary[1:]}. {more}",
    )
    parser.example = example
    parser.set_defaults(run=run)
    if name != "words":
        parser.add_argument("--with", dest="with_", action="append", default=[], metavar="KEY=VALUE", help=WITH_HELP)
    return parser
