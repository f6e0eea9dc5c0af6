"""From the bytes of a file to the bytes of a text: gzip is opened, what is not text is named and refused."""

from __future__ import annotations

import gzip
import io
import zlib

from analysis.errors import InputError
from analysis.intake.opener import CHUNK, LARGEST_FILE, too_large

GZIP = b"\x1f\x8b"
TEXT_WANTED = "expected a text table with one interaction per line"
STEEPEST = 250
"""Times that gzip may expand a file beyond `FREE` bytes; tables of names reach 3 to 50."""
FREE = 64 << 20

SIGNATURES: tuple[tuple[int, bytes, str, str], ...] = (
    (0, b"\x89PNG", "a PNG picture", TEXT_WANTED),
    (0, b"\xff\xd8\xff", "a JPEG picture", TEXT_WANTED),
    (0, b"GIF89a", "a GIF picture", TEXT_WANTED),
    (0, b"GIF87a", "a GIF picture", TEXT_WANTED),
    (0, b"%PDF", "a PDF document", "copy the table out of it and save it as tab-separated text"),
    (
        0,
        b"\xd0\xcf\x11\xe0",
        "an old Excel workbook or Word document",
        "save the sheet as tab-separated text",
    ),
    (0, b"{\\rtf", "a word-processor document (RTF)", "save it as plain text"),
    (4, b"1AY&SY", "a bzip2 archive", "unpack it first, or pack it with gzip"),
    (0, b"\xfd7zXZ", "an xz archive", "unpack it first, or pack it with gzip"),
    (0, b"\x28\xb5\x2f\xfd", "a zstd archive", "unpack it first, or pack it with gzip"),
    (0, b"7z\xbc\xaf", "a 7z archive", "unpack it first, or pack it with gzip"),
    (0, b"Rar!\x1a", "a RAR archive", "unpack it first, or pack it with gzip"),
    (0, GZIP, "a gzip file packed twice", "unpack it once by hand"),
    (257, b"ustar\0", "a tar archive", "unpack it and name one of its files"),
    (257, b"ustar  \0", "a tar archive", "unpack it and name one of its files"),
    (0, b"SQLite format 3\0", "an SQLite database", "export the table of interactions as text"),
    (0, b"\x89HDF", "an HDF5 file", "export the table of interactions as text"),
    (0, b"PAR1\x15", "a Parquet table", "save the table as tab-separated text"),
    (0, b"\x93NUMPY", "a NumPy array", "save it as text, with names"),
    (0, b"RDX2\nX\n", "R data", "write the table from R with write.table"),
    (0, b"RDX3\nX\n", "R data", "write the table from R with write.table"),
    (0, b"X\n\0\0\0", "R data", "write the table from R with write.table"),
)
"""Offset, first bytes, what the file is, how to mend it; long enough that no gene symbol is taken for one."""

CONTROL = bytes(byte for byte in range(1, 32) if byte not in b"\t\n\v\f\r\x1a\x1b")
"""Bytes that texts do not contain; one in ten of random bytes."""
MOST_CONTROL = 0.02

UTF_16 = (b"\xff\xfe", b"\xfe\xff")


def unpack(data: bytes, source: str, limit: int = LARGEST_FILE) -> bytes:
    """Return the bytes of the text, unpacked where they were gzip.

    Parameters
    ----------
    data : bytes
        The file as it lies on disk.
    source : str
        Its name, for messages.
    limit : int
        Most bytes after unpacking.

    Raises
    ------
    InputError
        Where the file is empty, cut short, expands beyond all bounds, or is no text.
    """
    _refuse_empty(data, source)
    if data.startswith(GZIP):
        data = _gunzip(data, source, limit)
        _refuse_empty(data, source)
    if len(data) > limit:
        raise too_large(source, limit)
    _refuse_binary(data, source)
    return data


def _refuse_empty(data: bytes, source: str) -> None:
    if not data.strip():
        raise InputError(source, "the file is empty", TEXT_WANTED)


def _gunzip(data: bytes, source: str, limit: int) -> bytes:
    """Unpack in pieces, so that a small file that expands without end stops early."""
    steep = max(FREE, STEEPEST * len(data))
    unpacked = bytearray()
    try:
        with gzip.GzipFile(fileobj=io.BytesIO(data)) as stream:
            while piece := stream.read(CHUNK):
                unpacked += piece
                if len(unpacked) > limit:
                    raise too_large(source, limit)
                if len(unpacked) > steep:
                    raise InputError(
                        source,
                        f"gzip expands the file more than {STEEPEST} times, which no table does",
                        "unpack it by hand and look at it",
                    )
    except EOFError:
        raise InputError(
            source, "the gzip file is cut short", "copy or download it again; nothing was read from it"
        ) from None
    except (gzip.BadGzipFile, zlib.error) as error:
        raise InputError(
            source, f"the gzip file is damaged ({error})", "copy or download it again; nothing was read from it"
        ) from None
    return bytes(unpacked)


def _refuse_binary(data: bytes, source: str) -> None:
    """Name what the file is where its first bytes tell, and refuse NUL bytes anywhere."""
    for offset, first, what, remedy in SIGNATURES:
        if data.startswith(first, offset):
            raise InputError(source, f"this is {what}", remedy)
    if data.startswith(b"PK\x03\x04"):
        raise InputError(source, *_zipped(data))
    if data.startswith(UTF_16):
        return
    place = data.find(b"\0")
    if place >= 0:
        line = data.count(b"\n", 0, place) + 1
        raise InputError(source, "binary content (a NUL byte)", f"{TEXT_WANTED}, in UTF-8", line)
    head = data[: 1 << 16]
    if len(head) - len(head.translate(None, CONTROL)) > MOST_CONTROL * len(head):
        raise InputError(source, "binary content (control characters)", f"{TEXT_WANTED}, in UTF-8")


def _zipped(data: bytes) -> tuple[str, str]:
    """Return what a ZIP container holds and how to mend it."""
    inside = data[: 1 << 16] + data[-(1 << 16) :]
    if b"xl/" in inside:
        return "this is an Excel workbook", "save the sheet as tab-separated text"
    if b"opendocument.spreadsheet" in inside:
        return "this is an OpenDocument spreadsheet", "save the sheet as tab-separated text"
    if b"word/" in inside:
        return "this is a Word document", "save the table as tab-separated text"
    return "this is a ZIP archive", "unpack it and name one of its files, or pack the table with gzip"
