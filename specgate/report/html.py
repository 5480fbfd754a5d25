"""The compliance report as one HTML file: no network, works from a folder and without JavaScript."""

from __future__ import annotations

from specgate.report.view import view
from specgate.review.types import Review


def render(review: Review) -> str:
    """Return the report of a review as an HTML document."""
    from specgate.report.page import on_screen

    return on_screen(view(review))
