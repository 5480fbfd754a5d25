"""The one place where FLINT's working precision and series length are set; everywhere else they are arguments."""

from __future__ import annotations

from flint import ctx

HIGHEST = 4096
"""Bits beyond which a question stays open."""


class _Setting:
    """A context that sets one attribute of FLINT's and restores what was set before."""

    __slots__ = ("_before", "_name", "_value")

    def __init__(self, name: str, value: int) -> None:
        self._name = name
        self._value = value

    def __enter__(self) -> None:
        self._before: int = getattr(ctx, self._name)
        setattr(ctx, self._name, self._value)

    def __exit__(self, *_: object) -> None:
        setattr(ctx, self._name, self._before)


def working_precision(bits: int) -> _Setting:
    """Run the body of `with` at `bits` of binary precision and restore what was set before."""
    return _Setting("prec", bits)


def series_terms(count: int) -> _Setting:
    """Run the body of `with` with power series kept to `count` terms and restore what was set before."""
    return _Setting("cap", count)
