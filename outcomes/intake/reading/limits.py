"""Every bound of the reader in one place. A file beyond a bound is refused with a code; it is never cut to
fit."""

from __future__ import annotations

KIB = 1024
MIB = 1024 * KIB
GIB = 1024 * MIB

FILE_BYTES = 2 * GIB  # a text file or a Parquet file is streamed, so this bounds time, not memory
PACKAGE_BYTES = 256 * MIB  # a workbook as it lies on the disk
UNSEEKABLE_BYTES = 256 * MIB  # a stream that cannot be rewound is held in memory, never in a temporary file

LINE_BYTES = MIB  # one physical line
RECORD_CHARS = MIB  # one record, quoted line ends included
FIELD_CHARS = 64 * KIB
HEADER_CHARS = 512
COLUMNS = 500
SHEETS = 200
CHUNK_CHARS = 32 * MIB  # a chunk is closed early when its text reaches this

PARTS = 5_000  # files inside a workbook
UNPACKED_BYTES = GIB  # all of them together
UNPACKED_RATIO = 400  # unpacked to packed, for one part above RATIO_FREE_BYTES
RATIO_FREE_BYTES = 4 * MIB
SHARED_TEXT_CHARS = 128 * MIB
TAG_BYTES = MIB  # one XML tag with its attributes
XML_DEPTH = 64
MERGED_RANGES = 50_000
STYLES = 70_000  # the trade's spreadsheet allows about 65,000 cell formats (common practice)

KEPT_CELLS = 1_000_000  # a file below this is parsed once and held; above it is parsed twice, in chunks
FINDINGS = 1_000  # listed one by one; the rest is counted
