"""Ways to drive the editor in tests: in the same process, key by key, and through a pseudo-terminal with a screen.

Timeouts only bound how long a broken program may keep a test waiting; no test measures time.
"""

from __future__ import annotations

import asyncio
import fcntl
import os
import pty
import select
import struct
import subprocess
import termios
import time
from collections.abc import Callable, Mapping, Sequence
from pathlib import Path
from types import TracebackType
from typing import Any

import pyte
from textual import events
from textual.app import App
from textual.keys import _character_to_key

from planner.tui import terminal

PATIENCE_S = 20.0
ENTER, ESCAPE, TAB, SHIFT_TAB, BACKSPACE = "\r", "\x1b", "\t", "\x1b[Z", "\x7f"
UP, DOWN, RIGHT, LEFT = "\x1b[A", "\x1b[B", "\x1b[C", "\x1b[D"
PASTE_BEGINS, PASTE_ENDS = "\x1b[200~", "\x1b[201~"


async def settle(app: App[Any]) -> None:
    """Returns when the app has nothing left to do for the keys and messages sent so far."""
    await asyncio.wait_for(terminal.settle(app), PATIENCE_S)


async def painted(app: App[Any]) -> None:
    """Returns when the screen shows what there is to show; painting waits for Textual's next frame."""
    await settle(app)
    done = asyncio.Event()
    app.screen.call_after_refresh(done.set)
    await asyncio.wait_for(done.wait(), PATIENCE_S)
    await settle(app)


async def keys(app: App[Any], *names: str) -> None:
    """Presses keys one after the other: single characters as themselves, the others by Textual's name."""
    for name in names:
        key = _character_to_key(name) if len(name) == 1 and not name.isalnum() else name
        await _sent(app, events.Key(key, name if len(name) == 1 else None))


async def paste(app: App[Any], text: str) -> None:
    """Pastes a text as a terminal with marked pastes does."""
    await _sent(app, events.Paste(text))


async def _sent(app: App[Any], event: events.Event) -> None:
    event.set_sender(app)
    app.post_message(event)
    await settle(app)


class Terminal:
    """A program on a pseudo-terminal whose screen can be read. It answers no query, like a plain old terminal."""

    def __init__(
        self,
        argv: Sequence[str],
        *,
        cwd: Path | None = None,
        env: Mapping[str, str] | None = None,
        rows: int = 24,
        columns: int = 80,
    ) -> None:
        self.output = bytearray()  # all that the program wrote
        self._screen = pyte.Screen(columns, rows)
        self._stream = pyte.ByteStream(self._screen)
        self._master, slave = pty.openpty()
        _set_size(slave, rows, columns)
        environment = {**os.environ, "TERM": "xterm-256color", "PYTHONUTF8": "1", **(env or {})}
        try:
            self.process = subprocess.Popen(
                argv,
                cwd=cwd,
                env=environment,
                stdin=slave,
                stdout=slave,
                stderr=slave,
                start_new_session=True,
                preexec_fn=_take_terminal,
            )
        except BaseException:
            os.close(self._master)
            raise
        finally:
            os.close(slave)

    def __enter__(self) -> Terminal:
        return self

    def __exit__(self, kind: type[BaseException] | None, error: BaseException | None, at: TracebackType | None) -> None:
        self.close()

    def send(self, text: str | bytes) -> None:
        """Types the text, all of it at once; bytes go out as they are."""
        os.write(self._master, text.encode() if isinstance(text, str) else text)

    def resize(self, rows: int, columns: int) -> None:
        """Gives the window another size; the system tells the program."""
        self._screen.resize(rows, columns)
        _set_size(self._master, rows, columns)

    def screen(self) -> list[str]:
        """The lines as they are shown now, without blanks at their ends."""
        return [line.rstrip() for line in self._screen.display]

    def text(self) -> str:
        """The screen as one text."""
        return "\n".join(self.screen())

    def looks(self, text: str) -> pyte.screens.Char:
        """The first character of the first place where this text stands: its `reverse`, `bold`, `fg` and so on."""
        for row, line in enumerate(self._screen.display):
            if (column := line.find(text)) >= 0:
                return self._screen.buffer[row][column]
        raise AssertionError(self._report(f"{text!r} is not on the screen"))

    def wait_for(self, wanted: str | Callable[[list[str]], bool], timeout: float = PATIENCE_S) -> list[str]:
        """The screen as soon as it holds the text or satisfies the predicate; fails with what it showed instead."""
        ends = time.monotonic() + timeout
        while not self._holds(wanted):
            open_still = self._read(ends - time.monotonic())
            if not open_still and not self._holds(wanted):
                raise AssertionError(self._report(f"the program ended before {wanted!r} was shown"))
            if time.monotonic() >= ends and not self._holds(wanted):
                raise AssertionError(self._report(f"{wanted!r} was not shown within {timeout} s"))
        return self.screen()

    def wait_until_ended(self, timeout: float = PATIENCE_S) -> int:
        """The program's exit status, negative for a signal, with everything it wrote before."""
        ends = time.monotonic() + timeout
        while self.process.poll() is None:
            if time.monotonic() >= ends:
                raise AssertionError(self._report(f"the program did not end within {timeout} s"))
            if not self._read(0.02):
                return self._waited(ends - time.monotonic())
        while self._master >= 0 and self._read(0.0) and self._readable(0.0):
            pass
        return self.process.returncode

    def hang_up(self) -> None:
        """The connection is lost: the terminal goes away and stays away."""
        if self._master >= 0:
            os.close(self._master)
            self._master = -1

    def close(self) -> None:
        """Ends the program, by force if it must be, and gives the terminal back."""
        if self.process.poll() is None:
            self.process.kill()
        self.hang_up()
        self.process.wait()

    def _waited(self, timeout: float) -> int:
        try:
            return self.process.wait(max(0.0, timeout))
        except subprocess.TimeoutExpired:
            raise AssertionError(self._report("the program left its terminal but did not end")) from None

    def _holds(self, wanted: str | Callable[[list[str]], bool]) -> bool:
        return wanted in self.text() if isinstance(wanted, str) else wanted(self.screen())

    def _readable(self, timeout: float) -> bool:
        return bool(select.select([self._master], [], [], max(0.0, timeout))[0])

    def _read(self, timeout: float) -> bool:
        """Takes in what is written within the time; False when nobody can write any more."""
        if self._master < 0:
            return False
        if not self._readable(timeout):
            return True
        try:
            data = os.read(self._master, 65536)
        except OSError:  # Linux: the other end is closed
            return False
        self.output += data
        self._stream.feed(data.replace(b"\x1b[<u", b""))  # the screen does not know the end of kitty's keys
        return bool(data)

    def _report(self, message: str) -> str:
        ended = self.process.poll()
        state = "still runs" if ended is None else f"ended with status {ended}"
        return f"{message}; the program {state}; the screen:\n{self.text()}"


def _set_size(descriptor: int, rows: int, columns: int) -> None:
    fcntl.ioctl(descriptor, termios.TIOCSWINSZ, struct.pack("HHHH", rows, columns, 0, 0))


def _take_terminal() -> None:
    """In the new process: its standard input becomes the terminal that sends it signals."""
    fcntl.ioctl(0, termios.TIOCSCTTY, 0)
