"""Bad input by the dozen: each ends in one message that says where, what, and how to mend it."""

from __future__ import annotations

import gzip
import io
import os
import threading
import time
import zipfile

import pytest

from analysis.errors import InputError
from analysis.intake import parse_network, read_network
from analysis.intake.opener import read_bytes
from analysis.intake.unpacking import unpack


def zipped(name: str, content: bytes = b"x") -> bytes:
    stream = io.BytesIO()
    with zipfile.ZipFile(stream, "w") as archive:
        archive.writestr("[Content_Types].xml", "<Types/>")
        archive.writestr(name, content)
    return stream.getvalue()


TABLE = b"a\tb\t1\n" * 2000
PACKED = gzip.compress(os.urandom(4000).hex().encode())

BAD = {
    "nothing": (b"", None, "empty"),
    "blanks only": (b" \n\n\t\n", None, "empty"),
    "byte order mark only": (b"\xef\xbb\xbf", None, "empty"),
    "separators only": (b",,,\n,,\n", None, "empty"),
    "gzip of nothing": (gzip.compress(b""), None, "empty"),
    "comments only": (b"# a\n% b\n// c\n", None, "only comments"),
    "header only": (b"source\ttarget\tweight\n", 1, "a header and nothing below"),
    "one column": (b"tor1\nar1\n", 1, "one column ('tor1')"),
    "one column after a comment": (b"# list\ntor1\nar1\n", 2, "one column"),
    "one column with a trailing tab": (b"tor1\t\nar1\t\n", 1, "one column"),
    "one row, one word": (b"tor1", 1, "one column"),
    "NUL": (b"a\tb\nc\t\0d\n", 2, "NUL"),
    "control characters": (bytes(range(1, 32)) * 40, None, "control characters"),
    "PNG": (b"\x89PNG\r\n\x1a\n\0\0\0\rIHDR", None, "PNG picture"),
    "JPEG": (b"\xff\xd8\xff\xe0\0\x10JFIF", None, "JPEG picture"),
    "PDF": (b"%PDF-1.7\n%\xe2\xe3", None, "PDF document"),
    "workbook": (zipped("xl/workbook.xml"), None, "an Excel workbook; save the sheet as tab-separated text"),
    "document": (zipped("word/document.xml"), None, "Word document"),
    "zip": (zipped("table.tsv", TABLE), None, "ZIP archive"),
    "old workbook": (b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1", None, "save the sheet as tab-separated text"),
    "bzip2": (b"BZh91AY&SY\0", None, "bzip2"),
    "xz": (b"\xfd7zXZ\0", None, "xz archive"),
    "packed twice": (gzip.compress(PACKED), None, "packed twice"),
    "packed picture": (gzip.compress(b"\x89PNG\r\n"), None, "PNG picture"),
    "R data": (gzip.compress(b"X\n\0\0\0\3"), None, "R data"),
    "SQLite": (b"SQLite format 3\0", None, "SQLite"),
    "gzip cut short": (gzip.compress(TABLE)[:-9], None, "cut short"),
    "gzip cut in its head": (gzip.compress(TABLE)[:6], None, "cut short"),
    "gzip damaged": (PACKED[:200] + b"\xff" * 40 + PACKED[240:], None, "damaged"),
    "gzip with rubbish behind": (gzip.compress(TABLE) + b"rubbish", None, "damaged"),
    "UTF-16 that is none": (b"\xff\xfea\0\x00\xd8b", None, "UTF-16"),
    "web page": (b"<!DOCTYPE html>\n<html><body>Sign in</body></html>", 1, "web page"),
    "mark-up": (b"<?xml version='1.0'?>\n<root/>", 1, "mark-up"),
    "JSON": (b'[{"source": "a", "target": "b"}]', 1, "JSON"),
    "weights all missing": (b"source\ttarget\tweight\na\tb\tNA\nb\tc\t\n", 2, "none of the 2 rows"),
    "weights all text": (b"source\ttarget\tweight\na\tb\theavy\n", 2, "'heavy' is not a number"),
    "weights all zero": (b"a\tb\t0\nb\tc\t0\n", 1, "weight is zero"),
    "weights all negative": (b"a\tb\t-1\nb\tc\t-2\n", 1, "'-1' is negative"),
    "weights all infinite": (b"a\tb\tinf\n", 1, "is infinite"),
    "labels all empty": (b"\tb\n\tc\n", 1, "empty label in column 1"),
    "weight column without cells": (b"source\ttarget\tweight\na\tb\nb\tc\n", 2, "too few columns"),
    "quotes never closed": (b'"a\tb\n"c\td\te\n', 1, "quotes are opened and not closed"),
    "labels all overlong": (b"x" * 5000 + b"\ty\n", 1, "label too long: 5,000 characters"),
    "one huge line": (b"A" * 10_000_000, 1, "line too long: 10,000,000 characters"),
    "one huge line of cells": (b"A\t" * 5_000_000, 1, "line too long"),
    "one huge line of quotes": (b'"' * 10_000_000, 1, "line too long"),
    "one huge line below a comment": (b"# x\n" + b"A B " * 2_500_000, 2, "line too long"),
    "huge line after a header": (b"source\ttarget\n" + b"A\t" * 5_000_000, 2, "line too long"),
}


@pytest.mark.parametrize("case", BAD)
def test_bad_input_is_told_in_one_message(case):
    data, line, phrase = BAD[case]
    start = time.perf_counter()
    with pytest.raises(InputError) as raised:
        parse_network(data, "interactions.tsv")
    assert time.perf_counter() - start < 2
    error = raised.value
    assert error.where == "interactions.tsv"
    assert error.line == line
    assert phrase in str(error)
    assert error.remedy
    assert len(str(error)) < 400
    assert "\n" not in str(error)


def test_control_characters_never_reach_the_terminal():
    with pytest.raises(InputError) as raised:
        parse_network(b"source\ttarget\tweight\na\tb\t\x1b[2Jx\n", "x.tsv")
    assert "\x1b" not in str(raised.value)
    assert r"\x1b" in str(raised.value)


def test_gene_symbols_that_begin_like_file_signatures():
    for symbol in ("PAR1", "BZh1", "GIF8", "RDX", "Rar!"):
        assert parse_network(f"{symbol}\tar1\n".encode(), "x.tsv").network.edge_count == 1


def test_a_gzip_bomb_stops_early():
    bomb = gzip.compress(bytes(100_000_000))
    with pytest.raises(InputError, match="expands the file more than"):
        unpack(bomb, "bomb.gz")
    with pytest.raises(InputError, match="more than 1,000 bytes"):
        unpack(gzip.compress(TABLE), "large.gz", limit=1_000)
    with pytest.raises(InputError, match="more than 1,000 bytes"):
        unpack(TABLE, "large.tsv", limit=1_000)


def test_a_table_of_few_names_is_no_bomb():
    assert len(unpack(gzip.compress(TABLE * 1000), "same.gz")) == len(TABLE) * 1000


def test_files_that_cannot_be_opened(tmp_path):
    with pytest.raises(InputError, match="there is no such file"):
        read_network(tmp_path / "missing.tsv")
    with pytest.raises(InputError, match="this is a folder"):
        read_network(tmp_path)
    with pytest.raises(InputError, match="cannot be read"):
        read_network(tmp_path / ("x" * 300))
    with pytest.raises(InputError, match="cannot be read"):
        read_network("with\0null.tsv")
    (tmp_path / "file").write_text("a\tb\n")
    with pytest.raises(InputError, match="cannot be read"):
        read_network(tmp_path / "file" / "below")
    with pytest.raises(InputError, match="a device"):
        read_network("/dev/zero")
    with pytest.raises(InputError, match="more than 3 bytes"):
        read_bytes(tmp_path / "file", limit=3)


def test_a_file_that_may_not_be_read(tmp_path):
    path = tmp_path / "secret.tsv"
    path.write_text("a\tb\n")
    path.chmod(0)
    user = os.geteuid()
    if user == 0:  # the superuser may read everything, so become somebody else for a moment
        os.seteuid(65534)
    try:
        with pytest.raises(InputError, match="may not be read"):
            read_network(path)
    finally:
        if user == 0:
            os.seteuid(0)


def test_a_pipe_is_read_and_stops_at_the_limit(tmp_path):
    pipe = tmp_path / "pipe"
    os.mkfifo(pipe)
    for content, limit in ((b"a\tb\n", 100), (b"a\tb\n" * 100, 100)):
        writer = threading.Thread(target=pipe.write_bytes, args=(content,))
        writer.start()
        if len(content) > limit:
            with pytest.raises(InputError, match="more than 100 bytes"):
                read_bytes(pipe, limit=limit)
        else:
            assert read_bytes(pipe, limit=limit) == content
        writer.join()


def test_a_path_may_be_text(tmp_path):
    path = tmp_path / "net.tsv"
    path.write_text("a\tb\n")
    assert read_network(str(path)).network == read_network(path).network
