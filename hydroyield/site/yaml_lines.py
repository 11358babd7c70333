"""YAML that remembers its lines.

A site file is read into dicts, lists and the plain text of its scalars, with a table that gives
the line of every key. Scalars stay text, so that no reading of YAML's own (12:30 as minutes, on
as true, 017 as octal) can slip in. What makes a file hard to check by eye is refused: anchors,
aliases, merge keys, tags, several documents and keys that stand twice.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from typing import Any

import yaml

from hydroyield.site.faults import KeyPath

_LOADER: type = getattr(yaml, "CSafeLoader", yaml.SafeLoader)  # the C one is 15 times faster
_DEEPEST = 20  # levels; a site file has six
_NULLS = {"", "~", "null", "Null", "NULL"}

# what YAML does not call printable, and halves of surrogate pairs
_UNPRINTABLE = re.compile("[\x00-\x08\x0b\x0c\x0e-\x1f\x7f-\x84\x86-\x9f\ud800-\udfff\ufffe\uffff]")

NO_VALUE = "has no value; write one, or take the key out (text such as null goes in quotes)"
_ANCHOR = "anchors (&) and aliases (*) are not read; write the value out, or put text in quotes"
_TAG = "tags (!) are not read; write the plain value, or put text in quotes"
_MERGE = "merge keys (<<) are not read; write the keys out"
_BAD_KEY = "a list or a block stands where a key belongs; write a plain word and a colon"
_NO_KEY = "a colon without a key; write the key in front of it"
_TWO_DOCUMENTS = "a second document starts here; write one site per file and take '---' out"
_UNREADABLE_CHARACTER = "an unprintable character; delete it, and save the file as plain UTF-8 text"

# what the parsers (C and Python) call it -> what the user should look for
_SYNTAX = {
    r"mapping values are not allowed": "a second colon in one entry, or a line indented too far; "
    "line the keys up, and put text that holds a colon in quotes",
    r"expected ',' or '\]'": "a list in brackets is not closed or lacks a comma; write [a, b]",
    r"expected ',' or '\}'": "a block in braces is not closed or lacks a comma; write {a: 1, b: 2}",
    r"quoted scalar.*end of stream|quoted scalar.*document": "a quote is not closed; close it",
    r"expected ':'": "a line without a colon; write 'key: value'",
    r"escape": "a backslash in double quotes; write single quotes instead",
    r"an (alias|anchor)": _ANCHOR,
    r" tag": _TAG,
    r"directive|document start": "a line cannot start with % or ---; take it out",
    r"node content": "a bracket or a comma without a value before it; take it out",
    r"sequence entries": "a list starts on the line of its key; start it on a new line",
    r" tab ": "a tab in the indentation; write spaces",
    r"block collection|expected '-'": "an entry does not line up with the list above it; start "
    "each entry with '- ' in the same column",
    r"expected key|block end|block mapping": "a line does not line up with the keys above it; give "
    "all keys of one block the same indentation",
}
_SYNTAX_FALLBACK = "not readable as YAML; look for a wrong indentation, quote or bracket"


@dataclass(frozen=True)
class YamlFault:
    """One thing wrong with the YAML itself: where, in which line, and what to write instead."""

    path: KeyPath
    line: int
    message: str


@dataclass
class YamlDocument:
    """A YAML file as text scalars.

    content : dicts, lists and text; None where a value is empty or could not be read
    lines : line of each key and list entry, first line 1; the empty path is the whole file
    faults : what is wrong with the YAML
    unread : paths at which `content` does not hold what the user wrote
    """

    content: Any = None
    lines: dict[KeyPath, int] = field(default_factory=dict)
    faults: list[YamlFault] = field(default_factory=list)
    unread: set[KeyPath] = field(default_factory=set)

    def hides(self, path: KeyPath) -> bool:
        """Whether a finding at `path` only follows from a fault of the YAML."""
        return any(path[: len(hidden)] == hidden for hidden in self.unread)


def read_yaml(text: str) -> YamlDocument:
    """Read a YAML text. Nothing is raised: faults are in the document, also those of syntax."""
    walker = _Walker(text)
    unprintable = _UNPRINTABLE.search(text)
    if unprintable:
        line = text.count("\n", 0, unprintable.start()) + 1
        walker.refuse((), line, _UNREADABLE_CHARACTER)
        return walker.document
    try:
        walker.walk()
    except yaml.MarkedYAMLError as error:
        walker.refuse((), *_syntax_fault(error, text))
    except yaml.YAMLError:
        walker.refuse((), 1, _SYNTAX_FALLBACK)
    except _TooDeepError as error:
        walker.refuse((), error.line, f"nested deeper than {_DEEPEST} levels; look for a bracket")
    return walker.document


def line_of(lines: Mapping[KeyPath, int], path: KeyPath) -> int:
    """Line of a key; of the block it belongs in if the key is not in the file."""
    while path and path not in lines:
        path = path[:-1]
    return lines.get(path, 1)


class _TooDeepError(Exception):
    def __init__(self, line: int) -> None:
        self.line = line
        super().__init__(line)


class _Walker:
    """Turns the parser's events into a document, one node at a time."""

    def __init__(self, text: str) -> None:
        self.document = YamlDocument()
        self._events: Iterator[Any] = yaml.parse(text, Loader=_LOADER)

    def refuse(self, path: KeyPath, line: int, message: str, *, unread: bool = True) -> None:
        self.document.faults.append(YamlFault(path, line, message))
        if unread:
            self.document.unread.add(path)

    def walk(self) -> None:
        documents = 0
        for event in self._events:
            if isinstance(event, yaml.DocumentStartEvent):
                documents += 1
                if documents > 1:
                    self.refuse((), _line(event), _TWO_DOCUMENTS)
                    return
                root = next(self._events)
                self.document.lines[()] = _line(root)
                self.document.content = self._node(root, ())

    def _node(self, event: Any, path: KeyPath) -> Any:
        if len(path) > _DEEPEST:
            raise _TooDeepError(_line(event))
        self._refuse_marks(event, path)
        if isinstance(event, yaml.MappingStartEvent):
            return self._mapping(path)
        if isinstance(event, yaml.SequenceStartEvent):
            return self._sequence(path)
        if isinstance(event, yaml.ScalarEvent):
            return self._scalar(event, path)
        return None  # an alias

    def _refuse_marks(self, event: Any, path: KeyPath) -> None:
        if event.anchor is not None:
            self.refuse(path, _line(event), _ANCHOR)
        elif getattr(event, "tag", None) is not None:
            self.refuse(path, _line(event), _TAG)

    def _scalar(self, event: Any, path: KeyPath) -> str | None:
        text: str = event.value
        if _is_null(event) or not text.strip():
            if path and path not in self.document.unread:
                self.refuse(path, _line(event), NO_VALUE)
            return None
        if _UNPRINTABLE.search(text):
            self.refuse(path, _line(event), _UNREADABLE_CHARACTER)
            return None
        return text

    def _sequence(self, path: KeyPath) -> list[Any]:
        entries: list[Any] = []
        while not isinstance(event := next(self._events), yaml.SequenceEndEvent):
            entry = (*path, len(entries))
            self.document.lines.setdefault(entry, _line(event))
            entries.append(self._node(event, entry))
        return entries

    def _mapping(self, path: KeyPath) -> dict[str, Any]:
        block: dict[str, Any] = {}
        while not isinstance(event := next(self._events), yaml.MappingEndEvent):
            key = self._key(event, path)
            if key is None:
                self._node(next(self._events), (*path, "?"))
                continue
            inner = (*path, key)
            first = self.document.lines.get(inner)
            if key in block:
                message = f"the key stands twice, first in line {first}; keep one of the two"
                self.refuse(inner, _line(event), message, unread=False)
            self.document.lines.setdefault(inner, _line(event))
            block.setdefault(key, self._node(next(self._events), inner))
        return block

    def _key(self, event: Any, path: KeyPath) -> str | None:
        """Text of a key; None if it cannot be one, which hides what else the block lacks."""
        if not isinstance(event, yaml.ScalarEvent):
            self.refuse(path, _line(event), _BAD_KEY)
            if not isinstance(event, yaml.AliasEvent):
                self._node(event, (*path, "?"))
            return None
        self._refuse_marks(event, path)
        if _is_null(event) or not event.value.strip():
            self.refuse(path, _line(event), _NO_KEY)
            return None
        if event.value == "<<" and not event.style:
            self.refuse(path, _line(event), _MERGE)
            return None
        return str(event.value)


def _line(event: Any) -> int:
    return int(event.start_mark.line) + 1


def _is_null(event: Any) -> bool:
    # the C parser gives the style of a plain scalar as '' and the other as None
    return not event.style and event.value in _NULLS


def _syntax_fault(error: yaml.MarkedYAMLError, text: str) -> tuple[int, str]:
    """Line and message of what the parser stumbled over."""
    mark = error.problem_mark or error.context_mark
    if mark is None:
        return 1, _SYNTAX_FALLBACK
    there = ([*text.splitlines(), ""])[mark.line :][:1]
    line = there[0] if there else ""
    words = f"{error.context or ''}: {error.problem or ''}"
    if "\t" in line[: len(line) - len(line.lstrip())]:
        return mark.line + 1, _SYNTAX[" tab "]
    if line.lstrip().startswith(":"):
        return mark.line + 1, _NO_KEY
    if "cannot start any token" in words:
        return mark.line + 1, _bad_start(line, mark.column)
    message = next((plain for known, plain in _SYNTAX.items() if re.search(known, words)), None)
    starts_earlier = message is not None and re.search("not closed|without a colon", message)
    if starts_earlier and error.context_mark:
        return error.context_mark.line + 1, message or _SYNTAX_FALLBACK
    return mark.line + 1, message or _SYNTAX_FALLBACK


def _bad_start(line: str, column: int) -> str:
    character = line[column : column + 1]
    if character == "\t":
        return "a tab between the values; write spaces"
    return f"a value cannot start with '{character}'; put the text in quotes"
