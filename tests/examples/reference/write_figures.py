"""Write the figures of the example projects beside this folder: `python tests/examples/reference/write_figures.py`."""

from __future__ import annotations

import math
from pathlib import Path

import pilot_fermenter
import survey_airship

HEAD = """# Written by tests/examples/reference/write_figures.py; specgate has no part in it.
# Method: state equations wired by hand in SI, response by scipy.linalg.expm, extremes and crossings by
# scipy.optimize.brentq, poles by numpy.linalg.eigvals; good to about nine digits. Margins: the loop cut in its state
# equations, crossings by brentq on L(jw), the least distance to -1 by scipy.optimize.minimize_scalar.
# Units: of the signal as declared, s, % of the change, 1/s; dB, deg, rad/s. `null`: only approached.
"""
IN_SIGNAL_UNIT = {"final_value", "initial_value", "maximum_value", "minimum_value", "peak_deviation"}


def main() -> None:
    """Write one file per project and revision."""
    for module in (survey_airship, pilot_fermenter):
        for revision in "ab":
            lines = [HEAD, "poles:"]
            for name, loop in module.loops(revision).items():
                lines.append(f"  {name}:")
                lines += [f"    - [{_text(pole.real)}, {_text(pole.imag)}]" for pole in loop.poles]
            lines.append("responses:")
            for name, (step, unit) in module.responses(revision).items():
                lines.append(f"  {name}:")
                for measure, value in step.figures().items():
                    scale = unit if measure in IN_SIGNAL_UNIT else 1.0
                    lines.append(f"    {measure}: {'null' if value is None else _text(value / scale)}")
            lines.append("breaks:")
            for name, opened in module.breaks(revision).items():
                lines.append(f"  {name}:")
                lines += [f"    {measure}: {_text(value)}" for measure, value in opened.margins().items()]
            lines.append("settling_times:")
            lines += [f"  {name}: {_text(value)}" for name, value in module.settlings(revision).items()]
            target = Path(__file__).parent.parent / module.__name__ / f"rev_{revision}.figures.yaml"
            target.parent.mkdir(exist_ok=True)
            target.write_text("\n".join(lines) + "\n", encoding="utf-8")


def _text(value: float) -> str:
    return "infinite" if value == math.inf else f"{value:.12g}"


if __name__ == "__main__":
    main()
