"""From a site file on disk to a described site, or to every fault in it at once."""

from __future__ import annotations

import hashlib
from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import NoReturn

from pydantic import ValidationError

from hydroyield.errors import Fault, SiteFileError
from hydroyield.site.faults import KeyPath, findings_of, key_text
from hydroyield.site.models import SiteFile
from hydroyield.site.yaml_lines import YamlDocument, line_of, read_yaml

LARGEST_FILE = 1_000_000  # bytes; a site file has a few thousand

_EMPTY = "the file is empty; write 'format: 1' and the blocks site, discharge, head and turbines"
_NO_MAPPING = "the file holds no keys; write 'format: 1' and the blocks of a site, 'key: value'"


@dataclass(frozen=True)
class SiteDescription:
    """A site as it was described, with the way back to the lines of its file.

    path : the site file
    file_name : the file as the user named it, for messages
    folder : where the site file lies and its record is looked for
    model : what the file says, in SI
    lines : line of each key and list entry
    sha256 : of the bytes of the file, in hexadecimal digits
    text : of the file
    """

    path: Path
    file_name: str
    folder: Path
    model: SiteFile
    sha256: str
    lines: Mapping[KeyPath, int] = field(repr=False)
    text: str = field(default="", repr=False)

    @property
    def name(self) -> str:
        """Name of the site."""
        return self.model.site.name

    @property
    def record_paths(self) -> tuple[Path, ...]:
        """The files of the discharge record, none with a duration table; they may not exist."""
        record = self.model.discharge.record
        return () if record is None else tuple(self.folder / name for name in record.file)

    @property
    def reference_paths(self) -> tuple[Path, ...]:
        """The files of the reference record, none without one; they may not exist."""
        reference = self.model.discharge.reference
        return () if reference is None else tuple(self.folder / name for name in reference.file)

    def is_given(self, path: KeyPath) -> bool:
        """Whether the file holds this key, so that it was not filled in."""
        return path in self.lines

    def line_of(self, path: KeyPath) -> int:
        """Line of a key; of the block it belongs in if the key is not in the file."""
        return line_of(self.lines, path)

    def fault(self, path: KeyPath, message: str) -> Fault:
        """A fault of this file. The message says what is wrong and what to write instead."""
        return Fault(self.file_name, self.line_of(path), key_text(path), message)


def read_site_file(path: str | Path) -> SiteDescription:
    """Read a site file.

    path : the YAML file

    Raises SiteFileError with every fault found, ordered by line. Whether the discharge record
    exists is not checked.
    """
    data = _read_bytes(path)
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        _refuse(path, line, "not UTF-8 text; save the file with the encoding UTF-8")
    return read_site_text(text, path, hashlib.sha256(data).hexdigest())


def read_site_text(
    text: str, path: str | Path = "site.yaml", sha256: str | None = None
) -> SiteDescription:
    """Read a site from the text of a site file.

    text : YAML
    path : where the text comes from, or would lie; the record is looked for beside it
    sha256 : of the file, if the text comes from one; of the text in UTF-8 otherwise

    Raises SiteFileError with every fault found, ordered by line.
    """
    document = read_yaml(text)
    faults = [
        Fault(str(path), found.line, key_text(found.path), found.message)
        for found in document.faults
    ]
    model = _validated(document, path, faults)
    if model is None or faults:
        raise SiteFileError(sorted(faults, key=lambda fault: fault.line or 0))
    return SiteDescription(
        path=Path(path),
        file_name=str(path),
        folder=Path(path).parent,
        model=model,
        sha256=sha256 or hashlib.sha256(text.encode("utf-8")).hexdigest(),
        lines=document.lines,
        text=text,
    )


def _validated(document: YamlDocument, path: str | Path, faults: list[Fault]) -> SiteFile | None:
    """The model, or None and more faults."""
    if document.hides(()):
        return None
    if not isinstance(document.content, dict):
        empty = document.content is None
        line = line_of(document.lines, ())
        faults.append(Fault(str(path), line, "", _EMPTY if empty else _NO_MAPPING))
        return None
    try:
        return SiteFile.model_validate(document.content, context={"folder": Path(path).parent})
    except ValidationError as error:
        faults += [
            Fault(str(path), line_of(document.lines, where), key_text(where), message)
            for where, message in findings_of(error)
            if not document.hides(where)
        ]
    return None


def _read_bytes(path: str | Path) -> bytes:
    try:
        if Path(path).is_dir():
            _refuse(path, None, "is a folder; name the site file in it")
        if not Path(path).exists():
            _refuse(path, None, "there is no such file; check the name and the folder")
        if not Path(path).is_file():
            _refuse(path, None, "is not a regular file; name a YAML file")
        if Path(path).stat().st_size > LARGEST_FILE:
            _refuse(path, None, "is larger than 1 MB, which no site file is; name a YAML file")
        return Path(path).read_bytes()
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or "the name is not one of a file"
        _refuse(path, None, f"cannot be read ({reason.lower()}); check the file and its rights")


def _refuse(path: str | Path, line: int | None, message: str) -> NoReturn:
    raise SiteFileError([Fault(str(path), line, "", message)])
