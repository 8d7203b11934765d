"""What a real terminal needs beyond Textual: is it usable, input that can't end the program, signals, key order.

Textual is imported inside the functions only: the delay after Escape has to be in the environment before that.
"""

from __future__ import annotations

import asyncio
import codecs
import concurrent.futures
import os
import select
import signal
import sys
import termios
import threading
from collections.abc import Callable, Iterable, Iterator
from contextlib import suppress
from functools import partial
from types import FrameType
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from textual.app import App
    from textual.driver import Driver
    from textual.events import Key
    from textual.message import Message
    from textual.message_pump import MessagePump

ESCAPE = "\x1b"
ESCAPE_DELAY_MS = 400  # parts of one key's sequence come up to this far apart over a slow line
KEY_PATIENCE_S = 1.0  # how long the next key waits for the one before it
LEAVING = (  # end a half-written sequence; paste marks, kitty keys, mouse, focus reports, alternate screen off
    b"\x18\x1b[?2004l\x1b[<u\x1b[?1000l\x1b[?1003l\x1b[?1006l\x1b[?1015l\x1b[?1004l\x1b[?2048l"
    b"\x1b[?7h\x1b[0m\x1b[?1049l\x1b[?25h"
)


def usable() -> bool:
    """Whether a full screen can be shown: keyboard, output and messages on a terminal that is not dumb."""
    streams = (sys.__stdin__, sys.__stdout__, sys.__stderr__)
    return os.environ.get("TERM") != "dumb" and all(stream is not None and stream.isatty() for stream in streams)


def plain_ascii() -> bool:
    """Whether to draw in plain ASCII: Textual draws on standard error, which may not be UTF-8, or a console font."""
    term = os.environ.get("TERM", "")
    encoding = sys.__stderr__.encoding if sys.__stderr__ is not None else "ascii"
    return codecs.lookup(encoding).name != "utf-8" or term == "linux" or term.startswith("vt")


def prepare_environment() -> None:
    """Waits long enough for the rest of a key's sequence, unless the user chose otherwise. Call before Textual.

    A size that some wrapper left in the environment would be believed before the terminal's own and freeze the layout.
    """
    os.environ.setdefault("ESCDELAY", str(ESCAPE_DELAY_MS))
    for name in ("COLUMNS", "LINES"):
        os.environ.pop(name, None)


async def settle(app: App[Any]) -> None:
    """Returns when what was queued for the focused widget, everything around it and the app has been handled.

    Three rounds, since a key may post a message and the answer to it another one.
    """
    for _ in range(3):
        focused = app.focused or app.screen
        for node in (app, *focused.ancestors_with_self):
            await _drained(node)


async def _drained(node: MessagePump) -> None:
    handled = asyncio.Event()
    if node.call_later(handled.set):
        await handled.wait()


def driver_class() -> type[Driver]:
    """A driver for `App(driver_class=...)` that survives bad input and hands keys on one by one.

    Textual queues a key while the message that answers the one before is still on its way up. Keys that come in
    one packet (a slow line, a fast typist) would then reach a widget that should have lost the keyboard by now,
    or still holds the text of the cell before.
    """
    from textual import events
    from textual.drivers import linux_driver

    _make_input_tolerant()

    class OrderedDriver(linux_driver.LinuxDriver):
        def process_message(self, message: Message) -> None:
            super().process_message(message)
            if isinstance(message, events.Key | events.Paste):
                self._wait_until_handled()

        def _wait_until_handled(self) -> None:
            slices = 20
            handled = asyncio.run_coroutine_threadsafe(settle(self._app), self._loop)
            for _ in range(slices):
                if self.exit_event.is_set() or concurrent.futures.wait([handled], KEY_PATIENCE_S / slices).done:
                    break
            handled.cancel()

    return OrderedDriver


def inner_names_known() -> bool:
    """Whether this Textual still has the inner names that the tolerant input replaces (written for 8.2.8)."""
    from textual._xterm_parser import XTermParser
    from textual.drivers import linux_driver

    names = ("_parse_extended_key", "_sequence_to_key_events")
    return hasattr(linux_driver, "getincrementaldecoder") and all(hasattr(XTermParser, name) for name in names)


def _make_input_tolerant() -> None:
    """A byte that is not UTF-8 becomes U+FFFD, a key code beyond Unicode no key. Without this both end the app."""
    from textual._xterm_parser import XTermParser
    from textual.drivers import linux_driver

    if not inner_names_known():
        return
    decoder = partial(codecs.getincrementaldecoder("utf-8"), errors="replace")
    vars(linux_driver)["getincrementaldecoder"] = lambda _encoding: decoder
    parse = XTermParser._parse_extended_key
    if parse.__module__ != __name__:
        XTermParser._parse_extended_key = _tolerant(parse)  # type: ignore[assignment]
        XTermParser._sequence_to_key_events = _escape_first(XTermParser._sequence_to_key_events)  # type: ignore[method-assign]


def _escape_first(keys_of: Callable[..., Iterable[Key]]) -> Callable[..., Iterable[Key]]:
    """Reads Escape and a key struck soon after it as these two keys, not as the key with Alt, which nothing here uses.

    Escape then a bracket, O, P or underscore begins a sequence of the terminal's own and is left alone.
    """
    from textual.events import Key

    def keys(parser: Any, sequence: str, alt: bool = False) -> Iterator[Key]:
        if len(sequence) == 2 and sequence[0] == ESCAPE and sequence[1] not in "[]OP_":
            yield Key("escape", ESCAPE)
            sequence = sequence[1]
        yield from keys_of(parser, sequence, alt)

    return keys


def _tolerant(parse: Callable[[Any, str], list[Key] | None]) -> Callable[[Any, str], list[Key] | None]:
    from textual.events import Key
    from textual.keys import Keys

    def parsed(parser: Any, sequence: str) -> list[Key] | None:
        try:
            return parse(parser, sequence)
        except (ValueError, OverflowError):
            return [Key(Keys.Ignore.value, None)]

    return parsed


def install_signal_handlers(
    app: App[Any], *, before_exit: Callable[[], None] = lambda: None, patience: float = 2.0
) -> None:
    """Ends in order on SIGTERM, SIGHUP and a lost terminal, with status 128 + signal. Call once the app runs.

    `before_exit` is called first, at most once, in the main thread. If the app has not ended `patience` seconds
    later, because its loop stands still or the terminal takes no more, the terminal is put back and the process
    ends at once.
    """
    ending = _Ending(app, before_exit, patience)
    for number in (signal.SIGHUP, signal.SIGTERM):
        signal.signal(number, ending.begin)
    threading.Thread(target=_watch_keyboard, name="planner-terminal", daemon=True).start()
    # After a stop and `fg` Textual leaves the screen blank until something repaints.
    app.app_resume_signal.subscribe(app, lambda _: _repaint(app))


def _repaint(app: App[Any]) -> None:
    app.refresh(repaint=True, layout=True)


class _Ending:
    """The way out after a signal. Python's own handlers run even while the event loop is blocked."""

    def __init__(self, app: App[Any], before_exit: Callable[[], None], patience: float) -> None:
        self.app = app
        self.before_exit = before_exit
        self.patience = patience
        self.loop = asyncio.get_running_loop()
        self.settings = getattr(app._driver, "attrs_before", None)
        self.begun = False

    def begin(self, number: int, _frame: FrameType | None) -> None:
        """Once: start the watchdog, do what must be done first, ask the app to end."""
        if self.begun:
            return
        self.begun = True
        watchdog = threading.Timer(self.patience, self.end_now, (128 + number,))
        watchdog.daemon = True
        watchdog.start()
        try:
            self.before_exit()
        finally:
            with suppress(RuntimeError):  # the loop has ended already
                self.loop.call_soon_threadsafe(partial(self.app.exit, return_code=128 + number))

    def end_now(self, status: int) -> None:
        """Puts the terminal back as far as it takes anything, then ends without waiting for anybody."""
        with suppress(OSError, termios.error):
            _put_terminal_back(self.settings)
        os._exit(status)


def _put_terminal_back(settings: list[Any] | None) -> None:
    keyboard = 0
    termios.tcflush(keyboard, termios.TCOFLUSH)
    if settings is not None:
        termios.tcsetattr(keyboard, termios.TCSANOW, settings)
    # Opened anew, so that not waiting is a setting of ours alone and not of the shell that shares the terminal.
    screen = os.open(os.ttyname(keyboard), os.O_WRONLY | os.O_NOCTTY | os.O_NONBLOCK)
    os.write(screen, LEAVING)


def _watch_keyboard() -> None:
    """Waits in a thread of its own until the terminal is gone; needed where SIGHUP does not arrive (nohup)."""
    lost = select.POLLHUP | select.POLLERR | select.POLLNVAL
    poll = select.poll()
    poll.register(0, 0)
    while not any(event & lost for _, event in poll.poll()):
        pass
    os.kill(os.getpid(), signal.SIGHUP)
