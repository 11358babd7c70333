"""The examples in the docstrings give what they say."""

from __future__ import annotations

import doctest
import importlib
import pkgutil

import pytest

import hydroyield

MODULES = [
    module.name
    for module in pkgutil.walk_packages(hydroyield.__path__, "hydroyield.")
    if not module.name.endswith("__main__")
]


@pytest.mark.parametrize("name", MODULES)
def test_examples(name: str) -> None:
    assert doctest.testmod(importlib.import_module(name)).failed == 0


def test_there_are_examples() -> None:
    finder = doctest.DocTestFinder(exclude_empty=True)
    found = [
        example
        for name in MODULES
        for test in finder.find(importlib.import_module(name))
        for example in test.examples
    ]
    assert len(found) >= 2
