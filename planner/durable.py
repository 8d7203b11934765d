"""Reading a text file whole; writing it such that a crash or a full disk leaves the old file or the new one."""

from __future__ import annotations

import codecs
import contextlib
import errno
import hashlib
import os
import stat
import tempfile
from collections.abc import Iterator
from pathlib import Path

_LIMIT = 1_000_000
"""Bytes; a plan above it is refused (the plan file, format 1)."""

_ELSEWHERE = "save under another name or in another folder"

_WHY_NOT_SAVED = {
    errno.ENOSPC: f"the disk is full; free some space or {_ELSEWHERE}",
    errno.EDQUOT: f"your disk quota is used up; free some space or {_ELSEWHERE}",
    errno.EACCES: f"you may not write in its folder; ask for permission or {_ELSEWHERE}",
    errno.EPERM: f"you may not write in its folder; ask for permission or {_ELSEWHERE}",
    errno.EROFS: f"its disk is read-only; {_ELSEWHERE}",
    errno.ENOENT: f"its folder does not exist; make the folder first or {_ELSEWHERE}",
    errno.ENOTDIR: f"its folder is a file; {_ELSEWHERE}",
    errno.ENAMETOOLONG: "the name is too long; choose a shorter one",
}


class ReadError(Exception):
    """A file can't be read; the text is a sentence that says why and what would be accepted."""


class SaveError(Exception):
    """A file was not written and what was there is as it was; the text is a sentence that says what to do."""


def read_text(path: Path, limit: int = _LIMIT) -> str:
    """The text of a UTF-8 file, line ends as they are; at most `limit` bytes. Raises `ReadError`."""
    with _read_errors(path):
        content, size = _content(path, limit + 1)
    if len(content) > limit:
        raise ReadError(f"{_shown(path)} has {size:,} bytes; at most {limit:,} are read.")
    if content.startswith(codecs.BOM_UTF8):
        raise ReadError(f"{_shown(path)} starts with a byte order mark; save it as UTF-8 without one.")
    try:
        return content.decode("utf-8")
    except UnicodeDecodeError as error:
        raise ReadError(f"{_shown(path)}: {_undecodable(content, error.start)}; save the file as UTF-8.") from error


def fingerprint(path: Path) -> str | None:
    """SHA-256 of the bytes on disk now, None where there is no file. Raises `ReadError`.

    The bytes count, not size and times, which a file rewritten in place can keep.
    """
    with _read_errors(path):
        try:
            return hashlib.sha256(_content(path)[0]).hexdigest()
        except FileNotFoundError:
            return None


def fingerprint_of(text: str) -> str:
    """The fingerprint of a file that holds this text."""
    return hashlib.sha256(text.encode()).hexdigest()


def write_atomically(path: Path, text: str) -> None:
    """Puts the text in place of the file, through symbolic links; mode and where allowed owner stay.

    Raises `SaveError`.
    """
    try:
        content = _encoded(text)
        target = Path(os.path.realpath(path))
        _replace(target, content, old=_replaceable(target))
    except SaveError as error:
        raise SaveError(f"{_shown(path)} was not saved: {error}.") from error
    except ValueError as error:
        raise SaveError(f"{_shown(path)} was not saved: no file can have this name; choose another.") from error
    except OSError as error:
        reason = _WHY_NOT_SAVED.get(error.errno or 0) or f"{_reason(error)}; try again or {_ELSEWHERE}"
        raise SaveError(f"{_shown(path)} was not saved: {reason}.") from error


def _shown(path: Path) -> str:
    """The name with everything escaped that a terminal could act upon or that can't be printed."""
    return "".join(each if each.isprintable() else ascii(each)[1:-1] for each in str(path))


def _reason(error: OSError) -> str:
    return (error.strerror or "the system gives no reason").lower()


@contextlib.contextmanager
def _read_errors(path: Path) -> Iterator[None]:
    """Turns what the system says about reading a path into a sentence."""
    try:
        yield
    except FileNotFoundError as error:
        raise ReadError(f"There is no file {_shown(path)}; check the name and the folder.") from error
    except IsADirectoryError as error:
        raise ReadError(f"{_shown(path)} is a folder; name a file in it.") from error
    except PermissionError as error:
        raise ReadError(f"You may not read {_shown(path)}; ask its owner for permission.") from error
    except ValueError as error:
        raise ReadError(f"No file can be named {_shown(path)}; check the name.") from error
    except OSError as error:
        raise ReadError(f"{_shown(path)} can't be read: {_reason(error)}; check the name and the disk.") from error


def _content(path: Path, most: int = -1) -> tuple[bytes, int]:
    """The first `most` bytes (-1: all) and the size in bytes of a regular file; opening a pipe would wait for ever."""
    mode = os.stat(path).st_mode
    if stat.S_ISDIR(mode):
        raise IsADirectoryError(errno.EISDIR, os.strerror(errno.EISDIR))
    if not stat.S_ISREG(mode):
        raise ReadError(f"{_shown(path)} is a device or a pipe; name a regular file.")
    with path.open("rb") as file:
        content = file.read(most)
        return content, max(len(content), os.fstat(file.fileno()).st_size)


def _undecodable(content: bytes, offset: int) -> str:
    line = content.count(b"\n", 0, offset) + 1
    return f"byte 0x{content[offset]:02x} at offset {offset} (line {line}) is not UTF-8 text"


def _encoded(text: str) -> bytes:
    try:
        return text.encode("utf-8")
    except UnicodeEncodeError as error:
        line = text.count("\n", 0, error.start) + 1
        what = f"character U+{ord(text[error.start]):04X} in line {line} can't be stored; remove it"
        raise SaveError(what) from error


def _replaceable(target: Path) -> os.stat_result | None:
    """What is at the target now, None where nothing is; a rename would replace a device or a protected file as well."""
    try:
        old = os.stat(target)
    except FileNotFoundError:
        return None
    if stat.S_ISDIR(old.st_mode):
        raise SaveError("this is a folder; name a file in it")
    if not stat.S_ISREG(old.st_mode):
        raise SaveError(f"this is a device or a pipe; {_ELSEWHERE}")
    if not os.access(target, os.W_OK):
        raise SaveError(f"the file is protected against writing; allow writing or {_ELSEWHERE}")
    return old


def _replace(target: Path, content: bytes, *, old: os.stat_result | None) -> None:
    descriptor, temporary = tempfile.mkstemp(prefix=".saving-", dir=target.parent)
    try:
        with os.fdopen(descriptor, "wb") as file:
            file.write(content)
            file.flush()
            _keep_owner_and_mode(descriptor, old)
            os.fsync(descriptor)
        os.replace(temporary, target)
    except BaseException:
        with contextlib.suppress(OSError):
            os.unlink(temporary)
        raise
    _flush_folder(target.parent)


def _keep_owner_and_mode(descriptor: int, old: os.stat_result | None) -> None:
    if old is None:
        os.fchmod(descriptor, 0o666 & ~_umask())
        return
    new = os.fstat(descriptor)
    if (new.st_uid, new.st_gid) != (old.st_uid, old.st_gid):
        _give(descriptor, old.st_uid, old.st_gid)
    # After the owner: giving a file away clears some of its mode.
    os.fchmod(descriptor, stat.S_IMODE(old.st_mode))


def _give(descriptor: int, owner: int, group: int) -> None:
    """To the owner and group, else to the group alone, else not at all: a file saved as one's own beats none."""
    try:
        os.fchown(descriptor, owner, group)
    except OSError:
        with contextlib.suppress(OSError):
            os.fchown(descriptor, -1, group)


def _umask() -> int:
    """It can only be read by setting it; the strict value does no harm should another thread make a file meanwhile."""
    mask = os.umask(0o077)
    os.umask(mask)
    return mask


def _flush_folder(folder: Path) -> None:
    """Makes the rename last through a power cut. The file is in place by now: a disk that can't is no failed save."""
    with contextlib.suppress(OSError):
        descriptor = os.open(folder, os.O_RDONLY | os.O_DIRECTORY)
        try:
            os.fsync(descriptor)
        finally:
            os.close(descriptor)
