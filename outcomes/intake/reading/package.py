"""The container of a workbook: a ZIP archive of XML parts, checked before anything is unpacked."""

from __future__ import annotations

import posixpath
import struct
import zipfile
import zlib
from collections.abc import Iterator
from contextlib import contextmanager
from typing import BinaryIO, cast

from outcomes.intake.reading.defects import Defects
from outcomes.intake.reading.limits import (
    PACKAGE_BYTES,
    PARTS,
    RATIO_FREE_BYTES,
    UNPACKED_BYTES,
    UNPACKED_RATIO,
)
from outcomes.intake.reading.xml_part import Part, parse

_BROKEN = (
    zipfile.BadZipFile,
    zlib.error,
    struct.error,
    EOFError,
    NotImplementedError,
    RuntimeError,
    ValueError,
    LookupError,
    OSError,
    OverflowError,
)
_METHODS = (zipfile.ZIP_STORED, zipfile.ZIP_DEFLATED)
_ENCRYPTED_FLAG = 1


class Package:
    """A checked workbook container. Raises Fatal for what the reader does not open."""

    def __init__(self, stream: BinaryIO, defects: Defects) -> None:
        self.defects = defects
        size = stream.seek(0, 2)
        stream.seek(0)
        if size > PACKAGE_BYTES:
            raise defects.fatal("READ.FILE-LONG", detail=f"{size} bytes, {PACKAGE_BYTES} are taken")
        with self._unpacking(defects):
            self._zip = zipfile.ZipFile(stream)
        self.names = {info.filename for info in self._zip.infolist()}
        self._check_sizes()
        self._check_kind()

    def _check_sizes(self) -> None:
        infos = self._zip.infolist()
        if len(infos) > PARTS or sum(info.file_size for info in infos) > UNPACKED_BYTES:
            raise self.defects.fatal("READ.PACKED")
        for info in infos:
            if info.file_size > RATIO_FREE_BYTES and info.file_size > UNPACKED_RATIO * info.compress_size:
                raise self.defects.fatal("READ.PACKED", detail="a part is packed beyond belief")
            if info.flag_bits & _ENCRYPTED_FLAG:
                raise self.defects.fatal("READ.ENCRYPTED")
            if info.compress_type not in _METHODS:
                raise self.defects.fatal("READ.WORKBOOK", detail="a part is packed in a way that is not read")
        if len(self.names) != len(infos):
            raise self.defects.fatal("READ.WORKBOOK", detail="two parts have the same name")

    def _check_kind(self) -> None:
        if "[Content_Types].xml" not in self.names:
            raise self.defects.fatal("READ.KIND", detail="it is a ZIP archive, not a workbook")
        lowered = {name.lower() for name in self.names}
        if any(name.endswith("vbaproject.bin") or name.startswith("xl/macrosheets/") for name in lowered):
            raise self.defects.fatal("READ.MACROS")
        if any(name.startswith("xl/externallinks/") for name in lowered):
            raise self.defects.fatal("READ.EXTERNAL-LINKS")
        types = _Types()
        self.read("[Content_Types].xml", types)
        if types.has_macros:
            raise self.defects.fatal("READ.MACROS")

    @contextmanager
    def _unpacking(self, defects: Defects) -> Iterator[None]:
        try:
            yield
        except _BROKEN:
            raise defects.fatal("READ.WORKBOOK", detail="the archive cannot be unpacked") from None

    def walk(self, name: str, part: Part, defects: Defects) -> Iterator[None]:
        """Feed one part to `part`, yielding after every block."""
        if name not in self.names:
            raise defects.fatal("READ.WORKBOOK", detail="a part that is referred to is missing")
        with self._unpacking(defects), self._zip.open(name) as stream:
            yield from parse(cast(BinaryIO, stream), part, defects)

    def read(self, name: str, part: Part) -> None:
        """Feed one part to `part`, whole."""
        for _ in self.walk(name, part, self.defects):
            pass

    def blocks(self, name: str, defects: Defects) -> Iterator[bytes]:
        """Raw bytes of one part."""
        with self._unpacking(defects), self._zip.open(name) as stream:
            while block := stream.read(1 << 20):
                yield block

    def relations(self, name: str) -> dict[str, tuple[str, str]]:
        """Id -> (last word of the type, name of the part) of everything that part `name` refers to inside the
        file."""
        folder, base = posixpath.split(name)
        relations = _Relations(folder)
        self.read(posixpath.join(folder, "_rels", base + ".rels"), relations)
        return relations.found


class _Types(Part):
    has_macros = False

    def start(self, name: str, attributes: dict[str, str]) -> None:
        kind = attributes.get("ContentType", "").lower()
        self.has_macros |= "macroenabled" in kind or "vbaproject" in kind


class _Relations(Part):
    def __init__(self, folder: str) -> None:
        self.folder = folder
        self.found: dict[str, tuple[str, str]] = {}

    def start(self, name: str, attributes: dict[str, str]) -> None:
        if name != "Relationship" or attributes.get("TargetMode") == "External":
            return
        target = posixpath.normpath(posixpath.join("/", self.folder, attributes.get("Target", ""))).lstrip(
            "/"
        )
        kind = attributes.get("Type", "").rpartition("/")[2]
        self.found[attributes.get("Id", "")] = (kind, target)
