"""Opening a store: fixed settings on every connection, and the answer to a file that is not a store of ours."""

from __future__ import annotations

from pathlib import Path

import duckdb

from outcomes.errors import OutcomesError, StoreBusy, StoreProblem

SCHEMA_VERSION = 1
_CONFIG: dict[str, str | bool | int | float | list[str]] = {
    "autoinstall_known_extensions": "false",
    "autoload_known_extensions": "false",
    "allow_community_extensions": "false",
    "python_enable_replacements": "false",
}


def connect(path: Path, *, read_only: bool, memory_limit: str = "1500MB", spill: Path | None = None) -> duckdb.DuckDBPyConnection:
    """A hardened connection. spill: a 0700 folder for temporary files; without it nothing is spilled.

    Raises StoreBusy if another process writes, StoreProblem STORE.DAMAGED if the file cannot be read. Messages of the
    engine are never passed on: they quote values.
    """
    try:
        con = duckdb.connect(str(path), read_only=read_only, config=_CONFIG)
    except duckdb.Error as error:
        raise translate(error) from None
    con.execute("set TimeZone = 'UTC'")
    con.execute("set threads = 1")
    con.execute(f"set memory_limit = '{memory_limit}'")
    if spill is None:
        con.execute("set temp_directory = ''")
        con.execute("set max_temp_directory_size = '0GB'")
    else:
        con.execute("set temp_directory = '" + str(spill).replace("'", "''") + "'")
    return con


def harden(con: duckdb.DuckDBPyConnection) -> None:
    """No file or network access from SQL from here on, and no way back."""
    con.execute("set enable_external_access = false")
    con.execute("set lock_configuration = true")


def translate(error: duckdb.Error) -> OutcomesError:
    """An engine error as one of ours, without its text, which may quote a value."""
    text = str(error).lower()
    if isinstance(error, duckdb.IOException) and "lock" in text:
        return StoreBusy("STORE.BUSY", "another process is writing to the store", todo="wait until it has finished, then try again")
    if isinstance(error, duckdb.OutOfMemoryException):
        return StoreProblem("STORE.MEMORY", "not enough memory or temporary space", todo="import fewer rows at once; nothing was changed")
    if isinstance(error, duckdb.IOException) and ("space" in text or "could not write" in text):
        return StoreProblem("STORE.DISK-FULL", "the disk is full", todo="make room; the store has not been changed")
    if isinstance(error, (duckdb.BinderException, duckdb.CatalogException, duckdb.ParserException, duckdb.ConstraintException,
                          duckdb.ConversionException, duckdb.InvalidInputException)):  # fmt: skip
        return OutcomesError("INTERNAL.ENGINE", f"the database engine refused a step ({type(error).__name__})", todo="report this as a bug")
    return StoreProblem(
        "STORE.DAMAGED",
        "the store cannot be read",
        todo="restore it from a backup, or import the sources again into a new store; it has not been changed",
    )


def open_for_reading(path: Path) -> duckdb.DuckDBPyConnection:
    """The store, read-only and hardened. Raises StoreProblem with STORE.ABSENT, .EMPTY, .FOREIGN, .NEWER, .OLDER."""
    check_file(path)
    con = connect(path, read_only=True)
    try:
        _check_stamp(con)
    except BaseException:
        con.close()
        raise
    harden(con)
    return con


def check_file(path: Path) -> None:
    """What can be said of the file before the engine touches it."""
    if path.is_symlink():
        raise StoreProblem("STORE.LINKED", "the store is a symbolic link", todo="name the file itself")
    if not path.exists():
        raise StoreProblem("STORE.ABSENT", "there is no store at this place", todo="import a source first: outcomes import")
    if not path.is_file():
        raise StoreProblem("STORE.FOREIGN", "this is not a file", todo="name the store file")
    if path.stat().st_size == 0:
        raise StoreProblem("STORE.EMPTY", "the store has 0 bytes", todo="restore it from a backup, or delete it and import again")
    with path.open("rb") as stream:
        head = stream.read(12)
    if head[8:12] != b"DUCK":
        raise StoreProblem("STORE.FOREIGN", "this file is no store of ours", todo="name another file; this one was not changed")


def _check_stamp(con: duckdb.DuckDBPyConnection) -> None:
    try:
        row = con.execute("select schema_version from ledger.store").fetchone()
    except duckdb.Error:
        raise StoreProblem("STORE.FOREIGN", "this database is no store of ours", todo="name another file; this one was not changed") from None
    if row is None or row[0] != SCHEMA_VERSION:
        newer = row is not None and row[0] > SCHEMA_VERSION
        raise StoreProblem(
            "STORE.NEWER" if newer else "STORE.OLDER",
            "the store was written by a " + ("newer" if newer else "older") + " version of this program",
            todo="update the program" if newer else "import the sources again into a new store",
        )
