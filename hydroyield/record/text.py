"""From the bytes of a file to its text."""

from __future__ import annotations

import codecs
import difflib
import gzip
import hashlib
import zlib
from dataclasses import dataclass
from functools import cached_property
from pathlib import Path

from hydroyield.record.faults import Source

EXPORT_AS_CSV = "open it in the program that made it and export the record as CSV"
_OTHER_KINDS = {
    b"PK\x03\x04": "a workbook or a zip archive",
    b"\xd0\xcf\x11\xe0": "a workbook of an old kind",
    b"%PDF": "a PDF document",
}
_BYTE_ORDER_MARKS = {
    codecs.BOM_UTF8: "utf-8 with byte order mark",
    codecs.BOM_UTF16_LE: "utf-16",
    codecs.BOM_UTF16_BE: "utf-16",
}
_CODECS = {
    "utf-8": "utf-8",
    "utf-8 with byte order mark": "utf-8-sig",
    "utf-16": "utf-16",
    "cp1252": "cp1252",
}
HEAD = 200_000  # bytes, enough for the head of any format


@dataclass(frozen=True)
class Document:
    """The content of a record file.

    content : the bytes, unpacked where they were packed
    encoding : "utf-8", "utf-8 with byte order mark", "utf-16" or "cp1252"
    sha256 : of the bytes as they lie on disk
    is_ascii : whether the content has ASCII alone
    """

    content: bytes
    encoding: str
    sha256: str
    is_ascii: bool

    @cached_property
    def text(self) -> str:
        """The content as text, lines ended by "\\n"."""
        codec = _CODECS[self.encoding]
        text = self.content.decode(codec, "strict" if codec == "utf-8" else "replace")
        return text.replace("\r\n", "\n").replace("\r", "\n")

    @cached_property
    def head(self) -> str:
        """The first lines of the text, with whole lines only."""
        if not self.is_ascii or len(self.content) <= HEAD:
            return self.text
        start = self.content[:HEAD].decode("ascii")
        start = start.replace("\r\n", "\n").replace("\r", "\n")
        return start[: start.rfind("\n") + 1] or start


def read_document(path: Path, source: Source) -> Document:
    """Read a text file of any usual encoding; gzip is unpacked.

    Raises RecordError when the file is not there, is no text, or has no content.
    """
    stored = _stored_bytes(path, source)
    content = _unpacked(stored, source)
    if not content[:HEAD].strip() and not content.strip():
        raise source.error("the file is empty; give a discharge record with dates and values")
    is_ascii = content.isascii()
    encoding = _encoding(content, is_ascii, source)
    document = Document(content, encoding, hashlib.sha256(stored).hexdigest(), is_ascii)
    _refuse_web_page(document.head, source)
    return document


def _stored_bytes(path: Path, source: Source) -> bytes:
    try:
        return path.read_bytes()
    except FileNotFoundError:
        raise source.error(f"there is no such file{_did_you_mean(path)}", key="file") from None
    except IsADirectoryError:
        raise source.error("this is a folder; name the file in it", key="file") from None
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or "its name is not usable"
        raise source.error(f"the file cannot be read: {reason.lower()}", key="file") from None


def _did_you_mean(path: Path) -> str:
    try:
        names = [entry.name for entry in path.parent.iterdir() if entry.is_file()]
    except OSError:
        return "; check its name and the folder it lies in"
    close = difflib.get_close_matches(path.name, names, n=1)
    return f"; did you mean {close[0]}?" if close else "; check its name and the folder it lies in"


def _unpacked(stored: bytes, source: Source) -> bytes:
    if not stored.startswith(b"\x1f\x8b"):
        return stored
    try:
        return gzip.decompress(stored)
    except (OSError, EOFError, zlib.error):
        raise source.error(
            "this compressed file is damaged or cut short; fetch it again, or unpack it yourself"
        ) from None


def _encoding(content: bytes, is_ascii: bool, source: Source) -> str:
    for mark, encoding in _BYTE_ORDER_MARKS.items():
        if content.startswith(mark):
            return encoding
    _refuse_other_kinds(content, source)
    if is_ascii:
        return "utf-8"
    try:
        content.decode("utf-8")
    except UnicodeDecodeError:
        return "cp1252"
    return "utf-8"


def _refuse_other_kinds(content: bytes, source: Source) -> None:
    for start, kind in _OTHER_KINDS.items():
        if content.startswith(start):
            raise source.error(f"this is {kind}, not a text file; {EXPORT_AS_CSV}")
    if b"\0" in content:
        raise source.error(f"this is a binary file, not a text file; {EXPORT_AS_CSV}")


def _refuse_web_page(text: str, source: Source) -> None:
    if text.lstrip()[:15].lower().startswith(("<!doctype html", "<html")):
        raise source.error("this is a web page, not a record; download the data file itself")
