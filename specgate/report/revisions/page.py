"""Differences as one HTML document, by the templates; the same for the screen and for paper."""

from __future__ import annotations

from markupsafe import Markup

from specgate.report.page import environment, fonts, for_paper, hashed, template
from specgate.report.revisions.view import View, view
from specgate.revisions.types import Differences

SECTIONS = (
    ("front", "What got worse"),
    ("requirements", "Requirements that stand otherwise"),
    ("signed", "Signed verdicts that no longer stand"),
    ("responses", "Responses, old and new"),
    ("changes", "What was changed"),
    ("findings", "Findings"),
    ("cautions", "Cautions"),
)
ROWS_AT_MOST = 300
"""Requirements that a printed document holds; all are in the attached differences."""


def on_screen(found: Differences) -> str:
    """Return the differences as an HTML file that loads nothing and runs nothing."""
    styles = [
        ("", fonts()),
        ("", template("report/base.css")),
        ("", template("differences/differences.css")),
        ("screen", template("report/screen.css")),
        ("screen", template("differences/screen.css")),
        ("print", template("report/print.css")),
    ]
    policy = (
        f"default-src 'none'; style-src {' '.join(hashed(style) for _, style in styles)}; font-src data:; "
        "img-src data:; base-uri 'none'; form-action 'none'"
    )
    return _render(view(found), True, styles, policy)


def on_paper(seen: View, paper: str) -> str:
    """Return the document that is laid out as PDF; `paper` is A4 or Letter. Long lists are cut, and say so."""
    print_style = template("report/print.css").replace("size: A4", f"size: {paper}")
    styles = [("", template("report/base.css")), ("", print_style), ("", template("differences/differences.css"))]
    return for_paper(_render(seen, False, styles, ""))


def _render(seen: View, screen: bool, styles: list[tuple[str, str]], policy: str) -> str:
    shown = seen.requirements if screen else seen.requirements[:ROWS_AT_MOST]
    date = seen.new.date
    return (
        environment()
        .get_template("differences/differences.html.j2")
        .render(
            view=seen,
            screen=screen,
            sections=SECTIONS,
            styles=[(medium, Markup(style)) for medium, style in styles],
            policy=policy,
            requirements=shown,
            left_out=len(seen.requirements) - len(shown),
            created=None if date == "undated" else date,
        )
    )
