"""The editor in the same process, for tests: opened on a plan, driven key by key, read from its screen."""

from __future__ import annotations

import asyncio
from collections.abc import Callable, Coroutine
from difflib import unified_diff
from pathlib import Path
from typing import Any

from planner.plan import address_of, stated
from planner.planfile import load
from planner.tui.app import Planner

from .harness import keys, painted, paste, settle

PLANS = Path(__file__).parents[2] / "plans"
Scenario = Callable[[Planner], Coroutine[Any, Any, None]]


def copied(name: str, folder: Path) -> Path:
    path = folder / f"{name}.toml"
    path.write_bytes((PLANS / f"{name}.toml").read_bytes())
    return path


def use(path: Path, scenario: Scenario, *, size: tuple[int, int] = (80, 24)) -> Planner:
    """Opens the plan, goes through the scenario, and returns the app as it then is."""
    app = Planner(load(path, keep_unknown=True))

    async def session() -> None:
        async with app.run_test(size=size):
            await done(app)
            await scenario(app)
            await done(app)

    asyncio.run(session())
    return app


async def done(app: Planner) -> None:
    """Returns when the worker has reported and everything is painted."""
    await settle(app)
    await app.workers.wait_for_complete()
    await painted(app)


async def act(app: Planner, letter: str) -> None:
    await keys(app, "space", letter)


async def retype(app: Planner, text: str) -> None:
    """In a prompt: another text in place of the proposed one."""
    assert app.foot._prompt is not None
    await keys(app, *["backspace"] * len(app.foot._prompt[1].text))
    await paste(app, text)
    await keys(app, "enter")


def screen(app: Planner) -> list[str]:
    return ["".join(segment.text for segment in strip).rstrip() for strip in app.screen._compositor.render_strips()]


def foot(app: Planner) -> str:
    """The lines of help and messages, unfolded."""
    return " ".join(line for line in screen(app)[-3:-1] if line)


def typed(app: Planner, key: str) -> str | None:
    value = stated(app.session.plan, address_of(app.session.plan, key))
    return value if value is None or isinstance(value, str) else value.text


def changed_lines(before: bytes, after: bytes) -> list[str]:
    lines = unified_diff(before.decode().splitlines(), after.decode().splitlines(), n=0, lineterm="")
    return [line for line in lines if line[0] in "+-" and not line.startswith(("+++", "---"))]
