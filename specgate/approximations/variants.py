"""Rows of the catalogue that have several published formulas for the same thing."""

from __future__ import annotations

from specgate.approximations.approximation import Approximation, Variant


def offered(
    variants: tuple[Variant, ...],
    *,
    name: str,
    title: str,
    estimates: tuple[str, ...],
    text: str,
    premises: tuple[str, ...] = (),
    alternatives: tuple[str, ...] = (),
) -> Approximation:
    """Return the row of several formulas (at least one), which carries that of the first."""
    first = variants[0]
    return Approximation(
        name=name,
        title=title,
        estimates=estimates,
        formula=first.formula,
        source=first.source,
        conditions=first.conditions,
        evaluate=first.evaluate,
        accuracy=first.accuracy,
        text=text,
        premises=premises,
        alternatives=alternatives,
        variants=variants,
        variant=first.name,
    )
