"""From an audit to the pictures of its range: the formula's error over damping ratio, and what is near the pair."""

from __future__ import annotations

from specgate.report.digits import number, percent, signed
from specgate.report.figures.error import ErrorFigure
from specgate.report.figures.poles import Point, PoleFigure, Separation
from specgate.report.words import spaced
from specgate.review.types import BasisReview


def error_figure(basis: BasisReview, anchor: str) -> ErrorFigure | None:
    """Return the error of the formula over damping ratio; None where it is no rule for a pair."""
    curve = basis.error_curve
    if curve is None:
        return None
    here = curve.here
    name = spaced(basis.chain[-1]) + (f" ({spaced(basis.variant)})" if basis.variant else "")
    where = f"this loop at {number(here.damping, 3)}"
    if here.error is not None:
        where += f": {signed(percent(here.error))}"
    return ErrorFigure(
        name=f"error-{anchor}",
        title=f"Error of {name} over the damping ratio of a pair alone; {where}",
        damping=curve.damping,
        error=curve.error,
        lower=curve.lower,
        upper=curve.upper,
        here=None if here.error is None else (here.damping, here.error),
    )


def map_figure(basis: BasisReview, anchor: str) -> PoleFigure | None:
    """Return the map of poles and zeros with the separation that is asked for; None without a dominant pair."""
    found = basis.separation
    if found is None:
        return None
    poles = [Point("pole", p.real, p.imaginary, p.multiplicity) for p in found.poles]
    zeros = [Point("zero", z.real, z.imaginary, z.multiplicity) for z in found.zeros]
    outside = "other poles and zeros" if found.poles_too else "zeros" if found.zeros else ""
    pair = f"{number(found.real, 3)} ± {number(found.imaginary, 3)}j 1/s"
    return PoleFigure(
        name=f"map-{anchor}",
        title=f"Poles and zeros about the dominant pair at {pair}, and how far from it they have to be",
        points=(*poles, *zeros),
        separation=Separation(
            found.real_part,
            found.distance,
            outside,
            found.real,
            found.imaginary,
        ),
    )
