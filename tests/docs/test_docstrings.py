"""Every example in a docstring runs and shows what it says."""

import doctest
import pkgutil
from importlib import import_module
from types import ModuleType

import pytest

import fieldplan

NAMES = sorted(
    info.name
    for info in pkgutil.walk_packages(fieldplan.__path__, "fieldplan.")
    if not info.name.endswith("__main__")
)


@pytest.mark.parametrize("name", NAMES)
def test_docstring_examples_hold(name: str) -> None:
    """An example that no longer runs teaches the wrong thing."""
    module = import_module(name)
    outcome = doctest.testmod(module, optionflags=doctest.NORMALIZE_WHITESPACE)
    assert outcome.failed == 0


def public_functions(module: ModuleType) -> list[str]:
    """Name the public functions that a module itself defines."""
    return [
        key
        for key, value in vars(module).items()
        if callable(value)
        and not key.startswith("_")
        and getattr(value, "__module__", None) == module.__name__
        and hasattr(value, "__code__")
    ]


def test_every_public_function_is_documented() -> None:
    """A stranger reads docstrings first."""
    bare = [
        f"{name}.{key}"
        for name in NAMES
        for key in public_functions(import_module(name))
        if not (getattr(import_module(name), key).__doc__ or "").strip()
    ]
    assert bare == []
