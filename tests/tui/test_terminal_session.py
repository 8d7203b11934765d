"""The whole program on a pseudo-terminal: an edit from opening to `git diff`, signals, sizes, plain terminals."""

from __future__ import annotations

import os
import re
import signal
import subprocess
import sys
import termios
from pathlib import Path
from typing import Any

import pytest

from .harness import ENTER, ESCAPE, SHIFT_TAB, Terminal

ROOT = Path(__file__).parents[2]
DRAFT = "sq6-03-drafted.toml"
RESTORED = b"\x1b[?1049l"  # the screen from before comes back
CURSOR_SHOWN = b"\x1b[?25h"
SGR = re.compile(rb"\x1b\[([0-9;:]*)m")


@pytest.fixture
def repository(tmp_path: Path) -> Path:
    """A git repository with the drafted plan committed."""
    (tmp_path / DRAFT).write_bytes((ROOT / "plans" / DRAFT).read_bytes())
    git(tmp_path, "init", "-q")
    git(tmp_path, "add", DRAFT)
    git(tmp_path, "-c", "user.name=T", "-c", "user.email=t@example.org", "commit", "-q", "-m", "as drafted")
    return tmp_path


def git(folder: Path, *arguments: str) -> str:
    """Git without anybody's own settings."""
    environment = {**os.environ, "GIT_CONFIG_GLOBAL": os.devnull, "GIT_CONFIG_SYSTEM": os.devnull}
    return subprocess.run(
        ["git", *arguments], cwd=folder, env=environment, capture_output=True, text=True, check=True
    ).stdout


def opened(folder: Path, *, env: dict[str, str] | None = None, **options: Any) -> Terminal:
    environment = {"PYTHONPATH": str(ROOT), "COLORTERM": "truecolor", **(env or {})}
    return Terminal([sys.executable, "-m", "planner", DRAFT], cwd=folder, env=environment, **options)


def ready(session: Terminal) -> list[str]:
    """The first screen, complete."""
    return session.wait_for(lambda lines: any(">420 mT" in line for line in lines) and "Space actions" in lines[-1])


def frequency(lines: list[str], name: str) -> str:
    """The first result in the row of a qubit."""
    return next((line.split()[1] for line in lines if line.startswith(f" {name} ")), "")


def colours(output: bytes) -> set[int]:
    """The codes of the colours that were asked for (ECMA-48 8.3.117: 30 to 49; xterm: 90 to 107)."""
    codes = {int(code) for found in SGR.findall(output) for code in re.split(rb"[;:]", found) if code}
    return {code for code in codes if 30 <= code <= 38 or 40 <= code <= 48 or 90 <= code <= 107}


def test_an_edit_from_opening_to_one_changed_line(repository: Path) -> None:
    """Q1: nu = 2.00 x 13.99624 GHz/T x |(0.350 + 0.146, 0, 0.008) T| = 13.886 GHz (muB/h: CODATA 2022)."""
    with opened(repository) as session:
        assert frequency(ready(session), "Q1") == "15.845"
        session.send("350")
        session.wait_for("350 mT = 0.35 T. Then: ")
        session.send(ENTER)
        session.wait_for(lambda lines: frequency(lines, "Q1") == "13.886" and "not saved" in lines[0])
        session.send(" u")
        session.wait_for(lambda lines: frequency(lines, "Q1") == "15.845" and "not saved" not in lines[0])
        session.send("\x19")  # control-y
        session.wait_for(lambda lines: frequency(lines, "Q1") == "13.886")
        session.send("\x1a")  # control-z
        session.wait_for(lambda lines: frequency(lines, "Q1") == "15.845")
        session.send(" r")
        session.wait_for(lambda lines: frequency(lines, "Q1") == "13.886")
        session.send("\x13")  # control-s
        session.wait_for(f"saved {DRAFT}")
        session.send(" l")
        assert session.wait_until_ended() == 0
        assert RESTORED in session.output and CURSOR_SHOWN in session.output
    changed = [line for line in git(repository, "diff", "-U0").splitlines() if re.match(r"[+-](?!\+\+|--)", line)]
    assert changed == ['-field = "420 mT"', '+field = "350 mT"']
    assert git(repository, "status", "--porcelain") == f" M {DRAFT}\n"  # and nothing else is left behind


def test_keys_in_one_burst_keep_their_order(repository: Path) -> None:
    with opened(repository) as session:
        ready(session)
        session.send(f"350{ENTER} s{SHIFT_TAB}{SHIFT_TAB} n{ENTER} u l")
        assert session.wait_until_ended() == 0
    assert 'field = "350 mT"' in (repository / DRAFT).read_text()
    assert "Q7" not in (repository / DRAFT).read_text()


def test_escape_and_the_letter_after_it_are_two_keys(repository: Path) -> None:
    with opened(repository) as session:
        ready(session)
        session.send(f"9{ESCAPE} l")
        assert session.wait_until_ended() == 0


def test_another_size_shows_more_or_says_how_much_is_needed(repository: Path) -> None:
    with opened(repository) as session:
        assert not any("-- margins" in line for line in ready(session))
        session.resize(45, 140)
        session.wait_for(lambda lines: any("-- magnet" in line and "-- margins" in line for line in lines))
        session.resize(24, 50)
        session.wait_for("needs 60 and 16.")
        session.resize(24, 80)
        ready(session)
        session.send("350" + ENTER)
        session.wait_for(lambda lines: frequency(lines, "Q1") == "13.886")


@pytest.mark.parametrize("number", [signal.SIGTERM, signal.SIGHUP])
def test_a_signal_restores_the_terminal_and_touches_no_file(repository: Path, number: signal.Signals) -> None:
    with opened(repository) as session:
        ready(session)
        session.send("350" + ENTER)
        session.wait_for("not saved")
        session.process.send_signal(number)
        assert session.wait_until_ended() == 128 + number
        assert RESTORED in session.output and CURSOR_SHOWN in session.output
        flags = termios.tcgetattr(session._master)[3]
        assert flags & termios.ECHO and flags & termios.ICANON
    assert git(repository, "status", "--porcelain") == ""


@pytest.mark.parametrize(
    ("env", "allowed"),
    [
        ({"TERM": "xterm-256color", "NO_COLOR": "1"}, set()),
        ({"TERM": "xterm", "COLORTERM": ""}, set(range(30, 38)) | set(range(40, 48)) | set(range(90, 108))),
        ({"TERM": "screen", "COLORTERM": ""}, set(range(30, 38)) | set(range(40, 48)) | set(range(90, 108))),
        ({"TERM": "linux", "COLORTERM": ""}, set(range(30, 38)) | set(range(40, 48)) | set(range(90, 108))),
    ],
    ids=["no colour", "xterm", "screen", "linux"],
)
def test_plain_terminals_show_verdicts_by_attributes(repository: Path, env: dict[str, str], allowed: set[int]) -> None:
    with opened(repository, env=env) as session:
        ready(session)
        short = session.looks("short: gap")
        assert short.reverse and short.bold
        assert session.looks(">420 mT").bold and session.looks("420 mT    ").reverse
        session.send("350" + ENTER)
        session.wait_for(lambda lines: frequency(lines, "Q1") == "13.886")
        assert session.looks("tight: ").bold and not session.looks("tight: ").reverse
        assert colours(bytes(session.output)) <= allowed


@pytest.mark.parametrize("env", [{"TERM": "dumb"}, {}], ids=["dumb terminal", "no terminal"])
def test_without_a_terminal_the_first_screen_is_printed(repository: Path, env: dict[str, str]) -> None:
    environment = {**os.environ, "PYTHONPATH": str(ROOT), **env}
    done = subprocess.run(
        [sys.executable, "-m", "planner", DRAFT],
        cwd=repository,
        env=environment,
        stdin=subprocess.DEVNULL,
        capture_output=True,
        text=True,
        check=True,
        timeout=60,
    )
    lines = done.stdout.splitlines()
    assert lines[2].startswith("valley Q4 0.34 short: ") and "\x1b" not in done.stdout and done.stderr == ""
    assert any(line.split()[:2] == ["Q1", "15.845"] for line in lines)
