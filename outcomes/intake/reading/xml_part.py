"""One XML part of a workbook, streamed in bounded memory. A document type, and with it every entity, is
refused."""

from __future__ import annotations

from collections.abc import Iterator
from typing import BinaryIO
from xml.parsers import expat

from outcomes.intake.reading.defects import Defects
from outcomes.intake.reading.limits import KIB, TAG_BYTES, XML_DEPTH

_BLOCK = 64 * KIB


class _Doctype(Exception):
    pass


class _Deep(Exception):
    pass


class Part:
    """What a part is turned into. Names of elements and attributes come without their namespace prefix."""

    def start(self, name: str, attributes: dict[str, str]) -> None:
        """An element begins."""

    def end(self, name: str) -> None:
        """An element ends."""

    def text(self, data: str) -> None:
        """A piece of text; one text may come in several pieces."""


def parse(stream: BinaryIO, part: Part, defects: Defects) -> Iterator[None]:
    """Feed the part; yields after every block, so that the caller can take what is ready. Raises Fatal."""
    parser = _parser(part)
    fed = 0
    try:
        while block := stream.read(_BLOCK):
            parser.Parse(block, False)
            fed += len(block)
            if fed - parser.CurrentByteIndex > TAG_BYTES:
                raise defects.fatal("READ.WORKBOOK", detail="an XML tag of more than 1 MiB")
            yield
        parser.Parse(b"", True)
    except _Doctype:
        raise defects.fatal("READ.DOCTYPE") from None
    except _Deep:
        raise defects.fatal("READ.WORKBOOK", detail="XML elements nested too deeply") from None
    except (expat.ExpatError, ValueError, LookupError):
        raise defects.fatal("READ.WORKBOOK", detail="a part is not well-formed XML") from None
    yield


def _parser(part: Part) -> expat.XMLParserType:
    parser = expat.ParserCreate()
    depth = 0

    def start(name: str, attributes: dict[str, str]) -> None:
        nonlocal depth
        depth += 1
        if depth > XML_DEPTH:
            raise _Deep
        part.start(_local(name), {_local(key): value for key, value in attributes.items()})

    def end(name: str) -> None:
        nonlocal depth
        depth -= 1
        part.end(_local(name))

    def refuse(*_: object) -> None:
        raise _Doctype

    parser.StartElementHandler = start
    parser.EndElementHandler = end
    parser.CharacterDataHandler = part.text
    parser.StartDoctypeDeclHandler = refuse
    return parser


def _local(name: str) -> str:
    return name.rpartition(":")[2] if ":" in name else name
