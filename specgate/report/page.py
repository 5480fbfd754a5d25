"""From a view to one HTML document, by the templates; the same for the screen and for paper."""

from __future__ import annotations

import base64
import hashlib
import json
import re
from collections.abc import Sequence
from functools import cache
from importlib.resources import files
from typing import Any

from jinja2 import Environment, FunctionLoader, StrictUndefined, pass_context
from jinja2.runtime import Context
from markupsafe import Markup, escape

from specgate.report.figures import error, frequency, overlay, poles, reserve, step, wiring
from specgate.report.figures.scales import LogScale, Scale
from specgate.report.parts import audit, formulas, matrix, models, ranges
from specgate.report.view import View

SECTIONS = (
    ("front", "May we sign?"),
    ("matrix", "Compliance matrix"),
    ("audits", "Where the claims stand"),
    ("formulas", "Which formulas hold"),
    ("loops", "Loop sheets"),
    ("trace", "Trace"),
    ("open", "Waivers, deviations, open points"),
    ("findings", "Findings"),
    ("trust", "How to trust this report"),
    ("cautions", "Cautions"),
)
FACES = (
    ("DejaVu Sans", "normal", "DejaVuSans"),
    ("DejaVu Sans", "bold", "DejaVuSans-Bold"),
    ("DejaVu Sans Mono", "normal", "DejaVuSansMono"),
)
LINES_AT_MOST = 500
"""Lines that a printed list of findings or derivations holds."""


def resource(name: str) -> bytes:
    """Return a file that ships with the reports."""
    return files("specgate.templates").joinpath(*name.split("/")).read_bytes()


def template(name: str) -> str:
    """Return the text of a template, a style or a script."""
    return resource(name).decode()


Figure = (
    step.StepFigure
    | error.ErrorFigure
    | frequency.FrequencyFigure
    | poles.PoleFigure
    | reserve.ReserveBar
    | wiring.WiringFigure
    | overlay.OverlayFigure
)


def draw(figure: Figure) -> Markup:
    """Return a figure as SVG; its texts are escaped where they are written."""
    match figure:
        case step.StepFigure():
            return Markup(step.draw(figure))
        case error.ErrorFigure():
            return Markup(error.draw(figure))
        case frequency.FrequencyFigure():
            return Markup(frequency.draw(figure))
        case poles.PoleFigure():
            return Markup(poles.draw(figure))
        case reserve.ReserveBar():
            return Markup(reserve.draw(figure))
        case wiring.WiringFigure():
            return Markup(wiring.draw(figure))
        case overlay.OverlayFigure():
            return Markup(overlay.draw(figure))


def readings(figure: step.StepFigure | frequency.FrequencyFigure) -> str:
    """Return what a plot answers to the pointer with, as JSON: what is read across, and each curve with its panel."""
    found = _over_time(figure) if isinstance(figure, step.StepFigure) else _over_frequency(figure)
    return json.dumps(found, separators=(",", ":"))


def _over_time(figure: step.StepFigure) -> dict[str, Any]:
    x, y = step.axes(figure)
    unit = "" if figure.unit == "1" else figure.unit
    return {
        "across": _axis("t", "s", figure.time, x),
        "curves": [_axis(figure.signal, unit, figure.value, y)],
        "what": f"{figure.signal} along the time",
    }


def _over_frequency(figure: frequency.FrequencyFigure) -> dict[str, Any]:
    x, gain, phase = frequency.axes(figure)
    return {
        "across": {**_axis("ω", "rad/s", figure.frequency, x), "log": True},
        "curves": [_axis("gain", "dB", figure.gain, gain), _axis("phase", "deg", figure.phase, phase)],
        "what": "gain and phase along the frequency",
    }


def _axis(name: str, unit: str, values: Sequence[float], scale: Scale | LogScale) -> dict[str, Any]:
    ends = {"low": scale.low, "high": scale.high, "start": scale.start, "end": scale.end}
    return {"name": name, "unit": unit, "values": values, **ends}


def short(text: str, length: int) -> str:
    """Return text cut at `length` characters, at a word where there is one."""
    if len(text) <= length:
        return text
    cut = text[: length - 1]
    return (cut.rsplit(" ", 1)[0] if " " in cut[length // 2 :] else cut) + "…"


def quoted(text: str) -> Markup:
    """Return text with the names that stand between backticks set as names; all else is escaped."""
    parts = text.split("`")
    if len(parts) % 2 == 0:
        return escape(text)
    return Markup("").join(
        Markup('<span class="name">{}</span>').format(part) if k % 2 else escape(part) for k, part in enumerate(parts)
    )


@pass_context
def breakable(context: Context, name: str) -> Markup:
    """Return a name or a place in which a line may break after a dot, a slash, a colon or an underscore.

    On screen by an element, so that what is copied is the name; on paper by a character, which is laid out faster.
    """
    gap = Markup("<wbr>") if context["screen"] else Markup("\u200b")
    return gap.join(escape(part) for part in re.split(r"(?<=[./:_])", name))


@cache
def environment() -> Environment:
    """Return the template environment: everything is escaped, nothing may be undefined."""
    env = Environment(
        loader=FunctionLoader(template),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    env.filters["short"] = short
    env.filters["quoted"] = quoted
    env.filters["breakable"] = breakable
    env.globals.update(draw=draw, readings=readings)
    return env


def fonts() -> str:
    """Return the faces that a page on screen carries, as style."""
    faces = []
    for family, weight, name in FACES:
        data = base64.b64encode(resource(f"fonts/{name}.woff2")).decode()
        source = f'url(data:font/woff2;base64,{data}) format("woff2")'
        faces.append(f'@font-face{{font-family:"{family}";font-weight:{weight};src:{source}}}')
    return "\n".join(faces)


def hashed(text: str) -> str:
    """Return a text as the security policy of a page names it."""
    return f"'sha256-{base64.b64encode(hashlib.sha256(text.encode()).digest()).decode()}'"


def on_screen(view: View) -> str:
    """Return the HTML report: one file that loads nothing and runs one script, which its security policy names."""
    script = template("report/report.js")
    styles = [
        ("", fonts()),
        ("", template("report/base.css")),
        ("screen", template("report/screen.css")),
        ("print", template("report/print.css")),
    ]
    policy = (
        f"default-src 'none'; style-src {' '.join(hashed(style) for _, style in styles)}; script-src {hashed(script)}; "
        "font-src data:; img-src data:; base-uri 'none'; form-action 'none'"
    )
    return _render(
        view, True, styles, view.groups, 0, len(view.findings), len(view.trace), script=script, policy=policy
    )


def on_paper(view: View, paper: str) -> str:
    """Return the document that is laid out as PDF; `paper` is A4 or Letter. Long tables are cut, and say so."""
    styles = [
        ("", template("report/base.css")),
        ("", template("report/print.css").replace("size: A4", f"size: {paper}")),
    ]
    groups, left_out = matrix.printed(view.groups)
    return for_paper(_render(view, False, styles, groups, left_out, LINES_AT_MOST, LINES_AT_MOST))


def for_paper(html: str) -> str:
    """Return a document without what only the screen uses, and with its blanks where the layout engine wants them."""
    return _BLANK_BEFORE.sub(r"\1 ", _FIGURE_CLASS.sub("", html))


_FIGURE_CLASS = re.compile(r' class="[sf]-[a-z]+(?: [sf]-[a-z]+)?"')
"""Classes by which the screen recolours figures: paper does not, and is laid out faster without them."""


_BLANK_BEFORE = re.compile(r" (<(?:span|a|b)\b[^>]*>)")
"""A blank before an inline element is moved into it: the layout engine breaks a line after its first word where the
text before such an element fills the line but for that blank (WeasyPrint 70)."""


def _render(
    view: View,
    screen: bool,
    styles: list[tuple[str, str]],
    groups: tuple[matrix.Group, ...],
    left_out: int,
    findings: int,
    lines: int,
    **more: Any,
) -> str:
    owners = sorted({row.owner for group in view.groups for row in group.rows if row.owner})
    marked = {key: Markup(value) for key, value in more.items() if key == "script"}
    return (
        environment()
        .get_template("report/report.html.j2")
        .render(
            view=view,
            screen=screen,
            sections=[one for one in SECTIONS if one[0] != "formulas" or view.formulas],
            styles=[(medium, Markup(style)) for medium, style in styles],
            created=None if view.front.title.date == "undated" else view.front.title.date,
            owners=owners,
            groups=groups,
            left_out=left_out,
            findings=view.findings[:findings],
            findings_left_out=max(0, len(view.findings) - findings),
            trace_lines=view.trace[:lines],
            trace_left_out=max(0, len(view.trace) - lines),
            formulas=view.formulas if screen else formulas.printed(view.formulas),
            models_at_most=len(view.models) if screen else models.ROWS_AT_MOST,
            ranges_at_most=len(view.ranges) if screen else ranges.ROWS_AT_MOST,
            pictures_at_most=len(view.audits) if screen else audit.PICTURED_AT_MOST,
            **(more | marked),
        )
    )
