"""Files of ours on disk: owner only, written beside and renamed, one earlier generation while an import runs."""

from __future__ import annotations

import errno
import fcntl
import hashlib
import os
import secrets
import shutil
import time
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from outcomes.errors import StoreBusy, StoreProblem

BEFORE = ".before"
NEW = ".new"


def sha256_of(path: Path) -> str:
    digest = hashlib.sha256()
    with path.open("rb") as stream:
        while block := stream.read(1 << 20):
            digest.update(block)
    return digest.hexdigest()


def fsync_folder(folder: Path) -> None:
    handle = os.open(folder, os.O_RDONLY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)


def fsync_file(path: Path) -> None:
    handle = os.open(path, os.O_RDONLY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)


def write_private(path: Path, data: bytes) -> None:
    """A new file that only its owner can read, on the disk when this returns. Fails if it exists."""
    handle = os.open(path, os.O_WRONLY | os.O_CREAT | os.O_EXCL | os.O_NOFOLLOW, 0o600)
    with os.fdopen(handle, "wb") as stream:
        stream.write(data)
        stream.flush()
        os.fsync(stream.fileno())


def put_in_place(new: Path, path: Path) -> None:
    """Rename `new` to `path`; what was there is kept beside it as one earlier generation."""
    before = Path(str(path) + BEFORE)
    if path.exists():
        before.unlink(missing_ok=True)
        os.link(path, before)
    os.replace(new, path)
    fsync_folder(path.parent)


def beside(path: Path) -> Path:
    """Where the next generation of a file is written: on the same disk, whatever disk that is."""
    return Path(str(path) + NEW)


@contextmanager
def told_by_the_system() -> Iterator[None]:
    """A step that the operating system refuses becomes an error of ours, without the file name in it."""
    try:
        yield
    except OSError as error:
        if error.errno in (errno.ENOSPC, errno.EDQUOT, errno.EFBIG):
            code, what, todo = "STORE.DISK-FULL", "the disk is full", "make room; the store has not been changed"
        elif error.errno in (errno.EACCES, errno.EPERM, errno.EROFS):
            code, what, todo = "STORE.NOT-WRITABLE", "a file or its folder may not be written", "look at its permissions"
        else:
            code, what, todo = "STORE.FILE", "the operating system refused a step", "run the command again; it cleans up first"
        raise StoreProblem(code, what, todo=todo) from None


def drop_before(path: Path) -> None:
    Path(str(path) + BEFORE).unlink(missing_ok=True)


def work_prefix(store: Path) -> str:
    return f".{store.name}.work-"


@contextmanager
def work_folder(store: Path) -> Iterator[Path]:
    """A folder beside the store that only its owner can enter; gone at the end, swept by the next command otherwise."""
    folder = store.parent / (work_prefix(store) + secrets.token_hex(8))
    folder.mkdir(mode=0o700)
    try:
        yield folder
    finally:
        shutil.rmtree(folder, ignore_errors=True)


def sweep(store: Path) -> None:
    """Remove work folders that a killed import left behind. Only under the lock."""
    for folder in store.parent.glob(work_prefix(store) + "*"):
        shutil.rmtree(folder, ignore_errors=True)


@contextmanager
def writer_lock(store: Path, wait_seconds: float = 10.0) -> Iterator[None]:
    """One writer at a time. The lock belongs to the process: if it dies, the operating system lets go."""
    path = store.parent / f".{store.name}.lock"
    handle = os.open(path, os.O_RDWR | os.O_CREAT | os.O_NOFOLLOW, 0o600)
    try:
        tries = max(1, int(wait_seconds / 0.1))
        for attempt in range(tries):
            try:
                fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)
                break
            except BlockingIOError:
                if attempt == tries - 1:
                    raise StoreBusy(
                        "STORE.BUSY", "another process is writing to the store", todo="wait until it has finished, then try again"
                    ) from None
                time.sleep(0.1)
        yield
    finally:
        os.close(handle)


def require_private(path: Path, code: str) -> None:
    """Refuse a key file that others may read."""
    if path.is_symlink():
        raise StoreProblem(f"{code}.LINKED", "the file is a symbolic link", todo="name the file itself")
    if path.stat().st_mode & 0o077:
        raise StoreProblem(f"{code}.READABLE", "others may read this file", todo="chmod 600, and find out who has read it")
