"""Reading and atomic writing: what stays, what is said, and what is left on disk when the system says no."""

from __future__ import annotations

import errno
import hashlib
import os
import stat
from collections.abc import Callable
from pathlib import Path

import pytest

from planner import durable
from planner.durable import ReadError, SaveError, fingerprint, read_text, write_atomically

PROOF = 'format = 1\r\ntitle = "Gr\u00f6\u00dfe"\n'


@pytest.fixture
def plan(tmp_path: Path) -> Path:
    path = tmp_path / "plan.toml"
    path.write_bytes(b"old\n")
    return path


def fails(code: int) -> Callable[..., None]:
    def refuse(*_: object, **__: object) -> None:
        raise OSError(code, os.strerror(code))

    return refuse


def not_read(path: Path, limit: int = 100) -> str:
    with pytest.raises(ReadError) as caught:
        read_text(path, limit)
    return str(caught.value)


def not_saved(path: Path, text: str = "new") -> str:
    with pytest.raises(SaveError) as caught:
        write_atomically(path, text)
    return str(caught.value)


# Reading


def test_text_keeps_its_line_ends_both_ways(plan: Path) -> None:
    write_atomically(plan, PROOF)
    assert plan.read_bytes() == PROOF.encode()
    assert read_text(plan) == PROOF


def test_the_limit_counts_bytes_and_is_itself_allowed(plan: Path) -> None:
    plan.write_text("\u00b5" * 500, encoding="utf-8")
    assert read_text(plan, 1000) == "\u00b5" * 500
    plan.write_text("\u00b5" * 600, encoding="utf-8")
    assert not_read(plan, 1000) == f"{plan} has 1,200 bytes; at most 1,000 are read."


def test_what_is_not_a_readable_text_is_named(tmp_path: Path, plan: Path) -> None:
    missing, pipe = tmp_path / "none.toml", tmp_path / "pipe"
    os.mkfifo(pipe)
    assert not_read(missing) == f"There is no file {missing}; check the name and the folder."
    assert not_read(tmp_path) == f"{tmp_path} is a folder; name a file in it."
    assert not_read(pipe) == f"{pipe} is a device or a pipe; name a regular file."
    assert not_read(plan / "x") == f"{plan}/x can't be read: not a directory; check the name and the disk."
    assert not_read(Path("a\0b")) == r"No file can be named a\x00b; check the name."


def test_names_cannot_act_upon_the_terminal() -> None:
    assert not_read(Path("a\x1b[2J\u202e\udcff \u00e9")) == (
        r"There is no file a\x1b[2J\u202e\udcff " + "\u00e9; check the name and the folder."
    )


def test_a_forbidden_file_is_named(plan: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(Path, "open", fails(errno.EACCES))
    assert not_read(plan) == f"You may not read {plan}; ask its owner for permission."
    with pytest.raises(ReadError, match="You may not read"):
        fingerprint(plan)


def test_the_first_byte_that_is_not_utf8_is_named(plan: Path) -> None:
    plan.write_bytes(b"a = 1\nb = \xb5T\n")
    expected = f"{plan}: byte 0xb5 at offset 10 (line 2) is not UTF-8 text; save the file as UTF-8."
    assert not_read(plan) == expected
    plan.write_bytes(b"\xef\xbb\xbfa = 1\n")
    assert not_read(plan) == f"{plan} starts with a byte order mark; save it as UTF-8 without one."


def test_fingerprint_is_of_the_bytes_on_disk(tmp_path: Path, plan: Path) -> None:
    before, times = fingerprint(plan), plan.stat()
    assert before == hashlib.sha256(b"old\n").hexdigest()
    with plan.open("r+b") as file:
        file.write(b"odd\n")
    os.utime(plan, ns=(times.st_atime_ns, times.st_mtime_ns))
    assert fingerprint(plan) == hashlib.sha256(b"odd\n").hexdigest() != before
    (tmp_path / "dangling").symlink_to("nowhere")
    assert fingerprint(tmp_path / "none") is fingerprint(tmp_path / "dangling") is None


# Writing


@pytest.mark.parametrize("mode", [0o600, 0o640, 0o664])
def test_the_mode_of_the_old_file_stays(plan: Path, mode: int) -> None:
    plan.chmod(mode)
    write_atomically(plan, "new")
    assert stat.S_IMODE(plan.stat().st_mode) == mode


def test_a_new_file_gets_the_mode_of_any_new_file(tmp_path: Path) -> None:
    old = os.umask(0o027)
    try:
        write_atomically(tmp_path / "new.toml", "text")
        assert os.umask(0o027) == 0o027
    finally:
        os.umask(old)
    assert stat.S_IMODE((tmp_path / "new.toml").stat().st_mode) == 0o640
    assert os.listdir(tmp_path) == ["new.toml"]


def test_symbolic_links_are_followed_and_stay(tmp_path: Path, plan: Path) -> None:
    folder = tmp_path / "links"
    folder.mkdir()
    (folder / "one").symlink_to("two")
    (folder / "two").symlink_to(plan)
    write_atomically(folder / "one", "new")
    assert plan.read_text() == "new"
    assert sorted(os.listdir(folder)) == ["one", "two"]
    assert (folder / "one").readlink() == Path("two")


def test_the_owner_is_kept_where_allowed_else_the_group(plan: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    asked: list[tuple[int, int]] = []

    def refuse_owner(_: int, owner: int, group: int) -> None:
        asked.append((owner, group))
        if owner != -1:
            raise PermissionError(errno.EPERM, os.strerror(errno.EPERM))

    old = os.stat_result((0o100640, 0, 0, 1, 4711, 4712, 0, 0, 0, 0))
    monkeypatch.setattr(durable, "_replaceable", lambda _: old)
    monkeypatch.setattr(os, "fchown", refuse_owner)
    write_atomically(plan, "new")
    assert asked == [(4711, 4712), (-1, 4712)]
    assert plan.read_text() == "new" and stat.S_IMODE(plan.stat().st_mode) == 0o640


def test_bytes_are_on_disk_before_the_rename_and_the_rename_after(plan: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    steps: list[str] = []
    fsync, replace = os.fsync, os.replace

    def noted_fsync(descriptor: int) -> None:
        is_folder = stat.S_ISDIR(os.fstat(descriptor).st_mode)
        steps.append("folder" if is_folder else f"file of {os.fstat(descriptor).st_size}")
        fsync(descriptor)

    def noted_replace(source: str, target: Path) -> None:
        assert Path(source).parent == target.parent and Path(source).name.startswith(".")
        steps.append("rename")
        replace(source, target)

    monkeypatch.setattr(os, "fsync", noted_fsync)
    monkeypatch.setattr(os, "replace", noted_replace)
    write_atomically(plan, "12345")
    assert steps == ["file of 5", "rename", "folder"]


def test_a_folder_that_cannot_be_flushed_is_no_failed_save(plan: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    fsync = os.fsync
    refuse = fails(errno.EINVAL)
    monkeypatch.setattr(os, "fsync", lambda at: refuse() if stat.S_ISDIR(os.fstat(at).st_mode) else fsync(at))
    write_atomically(plan, "new")
    assert plan.read_text() == "new"


REASONS = [
    ("os.fsync", errno.ENOSPC, "the disk is full; free some space or save under another name or in another folder"),
    ("os.fsync", errno.EIO, "input/output error; try again or save under another name or in another folder"),
    ("os.replace", errno.EROFS, "its disk is read-only; save under another name or in another folder"),
    (
        "tempfile.mkstemp",
        errno.EACCES,
        "you may not write in its folder; ask for permission or save under another name or in another folder",
    ),
]


@pytest.mark.parametrize(("call", "code", "reason"), REASONS)
def test_a_failed_save_leaves_the_old_file_and_nothing_else(
    plan: Path, monkeypatch: pytest.MonkeyPatch, call: str, code: int, reason: str
) -> None:
    monkeypatch.setattr(call, fails(code))
    assert not_saved(plan) == f"{plan} was not saved: {reason}."
    assert os.listdir(plan.parent) == [plan.name] and plan.read_bytes() == b"old\n"


def test_a_disk_that_fills_up_while_writing_leaves_the_old_file(plan: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    fdopen = os.fdopen

    def full(descriptor: int, mode: str) -> object:
        os.close(descriptor)
        return fdopen(os.open("/dev/full", os.O_WRONLY), mode)

    monkeypatch.setattr(os, "fdopen", full)
    assert not_saved(plan, "x" * 100_000).startswith(f"{plan} was not saved: the disk is full; ")
    assert os.listdir(plan.parent) == [plan.name] and plan.read_bytes() == b"old\n"


def test_an_interrupted_save_leaves_no_temporary_file(plan: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def interrupt(*_: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr(os, "replace", interrupt)
    with pytest.raises(KeyboardInterrupt):
        write_atomically(plan, "new")
    assert os.listdir(plan.parent) == [plan.name] and plan.read_bytes() == b"old\n"


def test_only_a_regular_file_that_may_be_written_is_replaced(
    tmp_path: Path, plan: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    pipe = tmp_path / "pipe"
    os.mkfifo(pipe)
    elsewhere = "save under another name or in another folder"
    assert not_saved(pipe) == f"{pipe} was not saved: this is a device or a pipe; {elsewhere}."
    assert stat.S_ISFIFO(pipe.stat().st_mode)
    assert not_saved(tmp_path) == f"{tmp_path} was not saved: this is a folder; name a file in it."
    monkeypatch.setattr(os, "access", lambda *_: False)
    protected = f"the file is protected against writing; allow writing or {elsewhere}"
    assert not_saved(plan) == f"{plan} was not saved: {protected}."


def test_impossible_names_and_characters_are_named(tmp_path: Path, plan: Path) -> None:
    elsewhere = "save under another name or in another folder"
    nowhere, below, long = tmp_path / "no" / "p.toml", plan / "p.toml", tmp_path / ("n" * 300)
    assert not_saved(nowhere).endswith(f"its folder does not exist; make the folder first or {elsewhere}.")
    assert not_saved(below).endswith(f"its folder is a file; {elsewhere}.")
    assert not_saved(long).endswith("the name is too long; choose a shorter one.")
    assert not_saved(Path("a\0b")) == r"a\x00b was not saved: no file can have this name; choose another."
    expected = f"{plan} was not saved: character U+D800 in line 2 can't be stored; remove it."
    assert not_saved(plan, "a\n\ud800") == expected
