"""Whatever the caller hands in becomes a stream that can be read twice, without a temporary file."""

from __future__ import annotations

import io
from typing import BinaryIO

from outcomes.intake.reading.defects import Defects
from outcomes.intake.reading.limits import FILE_BYTES, MIB, UNSEEKABLE_BYTES


def rewindable(data: bytes | BinaryIO, defects: Defects) -> BinaryIO:
    """A stream at its beginning. Raises Fatal if the file is longer than the reader takes."""
    if isinstance(data, (bytes, bytearray, memoryview)):
        return io.BytesIO(data)
    if not data.seekable():
        return _held(data, defects)
    size = data.seek(0, 2)
    data.seek(0)
    if size > FILE_BYTES:
        raise defects.fatal("READ.FILE-LONG", detail=f"{size} bytes, {FILE_BYTES} are taken")
    return data


def _held(data: BinaryIO, defects: Defects) -> BinaryIO:
    held = io.BytesIO()
    while block := data.read(MIB):
        held.write(block)
        if held.tell() > UNSEEKABLE_BYTES:
            raise defects.fatal("READ.FILE-LONG", detail=f"a stream of more than {UNSEEKABLE_BYTES} bytes")
    held.seek(0)
    return held
