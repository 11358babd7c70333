"""The examples in the docstrings give what they say."""

from __future__ import annotations

import doctest
import importlib
import pkgutil

import hydroyield

MODULES = [
    module.name
    for module in pkgutil.walk_packages(hydroyield.__path__, "hydroyield.")
    if not module.name.endswith("__main__")
]


def test_examples() -> None:
    results = [doctest.testmod(importlib.import_module(name)) for name in MODULES]
    assert sum(result.failed for result in results) == 0
    assert sum(result.attempted for result in results) >= 2
