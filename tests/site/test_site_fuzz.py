"""Damaged site files give faults in plain words, whatever the damage."""

from __future__ import annotations

import random

from hypothesis import given
from hypothesis import strategies as st
from site_examples import BASE

from hydroyield.errors import SiteFileError
from hydroyield.site import read_site_text

FRAMEWORK_WORDS = (
    "Field required",
    "Input should",
    "Extra inputs",
    "alue error",
    "alidation error",
    "pydantic",
    "NoneType",
    "unhashable",
    "Traceback",
    "<class",
    "cannot be read; compare",  # the last resort, for what no validator of ours foresaw
)
LINES = BASE.splitlines()
VALUES = [
    *("", "~", "[]", "{}", "[1]", "{a: 1}", "-1", "1e999", "no", "12:30", "&a b", "*a", "!x y"),
    *("'", '"', "|", "- a", "0", "2", "1,5", "50 %", "5000 %", "[[0, 1], [1, 2]]", "[[0, 1], 2]"),
    *("other", "typical", "mm/d", "../x", "{level: 1, table: 2}", "[a, [b, {c: d}]]", "inf"),
]


def check(text: str) -> None:
    """Success, or faults that a person can act on: nothing else."""
    try:
        read_site_text(text)
    except SiteFileError as error:
        assert error.faults  # noqa: PT017
        for fault in error.faults:
            assert fault.line is not None
            assert 1 <= fault.line <= text.count("\n") + 2
            assert fault.message
            assert not any(word in fault.message for word in FRAMEWORK_WORDS), fault.message
        lines = [fault.line or 0 for fault in error.faults]
        assert lines == sorted(lines)


@st.composite
def damaged(draw: st.DrawFn) -> str:
    lines = list(LINES)
    for _ in range(draw(st.integers(1, 4))):
        here = draw(st.integers(0, len(lines) - 1))
        kind = draw(
            st.sampled_from(["delete", "double", "swap", "garble", "cut", "value", "shift"])
        )
        if kind == "delete" and len(lines) > 1:
            del lines[here]
        elif kind == "double":
            lines.insert(here, lines[here])
        elif kind == "swap":
            there = draw(st.integers(0, len(lines) - 1))
            lines[here], lines[there] = lines[there], lines[here]
        elif kind == "garble":
            shuffled = list(lines[here])
            random.Random(draw(st.integers(0, 1000))).shuffle(shuffled)
            lines[here] = "".join(shuffled)
        elif kind == "cut":
            lines[here] = lines[here][: draw(st.integers(0, len(lines[here])))]
        elif kind == "value":
            lines[here] = lines[here].partition(":")[0] + ": " + draw(st.sampled_from(VALUES))
        else:
            lines[here] = " " * draw(st.integers(0, 6)) + lines[here].strip()
    return "\n".join(lines) + "\n"


@given(damaged())
def test_damaged_lines(text: str) -> None:
    check(text)


@given(st.integers(0, len(BASE)), st.text(max_size=8), st.integers(0, 5))
def test_stray_text(place: int, stray: str, lost: int) -> None:
    check(BASE[:place] + stray + BASE[place + lost :])


@given(st.text(alphabet="ab1:-[]{},\n \t#&*!|>'\"%@`?<.~", max_size=60))
def test_any_text(text: str) -> None:
    check(text)
