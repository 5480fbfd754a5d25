"""The one place where FLINT's working precision and series length are set; everywhere else they are arguments."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager

from flint import ctx

HIGHEST = 4096
"""Bits beyond which a question stays open."""


@contextmanager
def working_precision(bits: int) -> Iterator[None]:
    """Run the body at `bits` of binary precision and restore what was set before."""
    before = ctx.prec
    ctx.prec = bits
    try:
        yield
    finally:
        ctx.prec = before


@contextmanager
def series_terms(count: int) -> Iterator[None]:
    """Run the body with power series kept to `count` terms and restore what was set before."""
    before = ctx.cap
    ctx.cap = count
    try:
        yield
    finally:
        ctx.cap = before
