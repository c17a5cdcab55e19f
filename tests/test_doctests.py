"""Every example in a docstring runs."""

import doctest
import pkgutil
from importlib import import_module

import pytest

import cornerwise

MODULES = sorted(m.name for m in pkgutil.walk_packages(cornerwise.__path__, "cornerwise."))


@pytest.mark.parametrize("name", MODULES)
def test_examples_of(name: str) -> None:
    assert doctest.testmod(import_module(name)).failed == 0


def test_there_are_examples() -> None:
    assert sum(doctest.testmod(import_module(name)).attempted for name in MODULES) >= 8
