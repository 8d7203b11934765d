"""Plans to edit, and an editor that leaves the signals of the test's process alone."""

from __future__ import annotations

from pathlib import Path

import pytest

from planner.tui import app as editor
from tests.tui.inprocess import copied


@pytest.fixture(autouse=True)
def _no_signal_handlers(monkeypatch: pytest.MonkeyPatch) -> None:
    """Signals and the watch over the keyboard belong to a process of the editor's own."""
    monkeypatch.setattr(editor.terminal, "install_signal_handlers", lambda _app: None)


@pytest.fixture
def drafted(tmp_path: Path) -> Path:
    return copied("sq6-03-drafted", tmp_path)


@pytest.fixture
def minimal(tmp_path: Path) -> Path:
    return copied("minimal", tmp_path)
