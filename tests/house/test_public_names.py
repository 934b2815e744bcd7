"""What `import interwind` offers is one sorted list, and every name on it is explained."""

from __future__ import annotations

import dataclasses
import inspect
import types

import interwind


def test_the_list_is_sorted_and_complete():
    """`__all__` is the sorted list of every public name the package holds."""
    public = {
        name
        for name, value in vars(interwind).items()
        if not name.startswith("_") and not isinstance(value, types.ModuleType)
    } - {"annotations"}
    assert list(interwind.__all__) == sorted(interwind.__all__)
    assert public == {name for name in interwind.__all__ if not name.startswith("_")}


def test_every_public_name_is_documented():
    """A class or function says what it is, in its own words, not in those a decorator made up."""
    silent = []
    for name in interwind.__all__:
        value = getattr(interwind, name)
        if inspect.isclass(value) or inspect.isfunction(value):
            said = value.__dict__.get("__doc__") if inspect.isclass(value) else value.__doc__
            if not said or (dataclasses.is_dataclass(value) and said.startswith(f"{value.__name__}(")):
                silent.append(name)
    assert [] == silent


def test_every_public_method_is_documented():
    """So is everything a caller can do with one of them."""
    silent = []
    for name in interwind.__all__:
        value = getattr(interwind, name)
        if inspect.isclass(value):
            for member, thing in inspect.getmembers(value):
                callable_here = inspect.isfunction(thing) or inspect.ismethod(thing) or isinstance(thing, property)
                if callable_here and not member.startswith("_") and not inspect.getdoc(thing):
                    silent.append(f"{name}.{member}")
    assert [] == silent
