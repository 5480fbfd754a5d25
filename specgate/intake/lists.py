"""Writes the lists inside the project schema from the tables: `python -m specgate.intake.lists`.

Everything else in `schemas/specgate.schema.json` is written by hand. A test compares the file with `rewritten`.
"""

from __future__ import annotations

import json
from importlib.resources import files
from pathlib import Path
from typing import Any

from specgate.approximations.table import APPROXIMATIONS, BY_RULE, LATER
from specgate.measures.table import MEASURES
from specgate.terms.units import UnitTable

_SUBJECTS = {"response": "a response", "break": "a break", "loop": "a loop"}


def rewritten(text: str) -> str:
    """Return the text of the schema with its lists made anew."""
    schema = json.loads(text)
    schema["$defs"]["measure"] = _measure()
    schema["$defs"]["measure_arguments"] = _measure_arguments()
    schema["$defs"]["approximation"] = _approximation()
    schema["$defs"]["variant"] = _variant()
    schema["$defs"]["unit"]["examples"] = sorted(UnitTable.standard().units)
    return json.dumps(schema, indent=2, ensure_ascii=False) + "\n"


def _measure() -> dict[str, Any]:
    return {
        "description": "A measure: a number, or a yes or no, read off a response, a break or a loop.",
        "type": "string",
        "enum": list(MEASURES),
        "x-rule": "name-unknown",
        "x-wanted": "a measure",
    }


def _approximation() -> dict[str, Any]:
    return {
        "description": "An approximation of the catalogue. `specgate explain NAME` tells its formula and range.",
        "type": "string",
        "enum": [*APPROXIMATIONS, *LATER, *BY_RULE],
        "x-rule": "name-unknown",
        "x-wanted": "an approximation",
    }


def _variant() -> dict[str, Any]:
    """Only examples: which approximation has which is said with its name, by `intake.criteria`."""
    names = dict.fromkeys(variant.name for row in APPROXIMATIONS.values() for variant in row.variants)
    return {
        "description": "One of several published formulas of an approximation.",
        "type": "string",
        "examples": list(names),
        "x-wanted": "the name of a variant",
    }


def _measure_arguments() -> dict[str, Any]:
    """Which measures are read on what a criterion is about, and which arguments each takes and needs.

    `dependentSchemas` is only looked at for keys that are there, which makes it quick.
    """
    taking: dict[str, list[str]] = {}
    needing: dict[str, list[str]] = {}
    for name, row in MEASURES.items():
        for argument in row.arguments:
            taking.setdefault(argument.name, []).append(name)
            if argument.required:
                needing.setdefault(argument.name, []).append(name)
    fitting = {kind: [name for name, row in MEASURES.items() if kind in row.subjects] for kind in _SUBJECTS}
    subjects = {kind: _measure_among(names, _not_read_on(_SUBJECTS[kind])) for kind, names in fitting.items()}
    arguments = {key: _measure_among(names, _belongs(key, names), key) for key, names in taking.items()}
    return {
        "dependentSchemas": {**subjects, **arguments},
        "allOf": [{"if": _measure_in(names), "then": _needed(key, names)} for key, names in needing.items()],
    }


def _measure_among(names: list[str], say: str, key: str = "measure") -> dict[str, Any]:
    """Return what `measure` may be; where it is not, `say` is said at `key`."""
    return {"properties": {"measure": {"enum": names, "x-say": say, "x-key": key}}}


def _not_read_on(subject: str) -> str:
    return f"`{{found}}` is not read on {subject}: `specgate explain {{found}}` tells where it is"


def _belongs(key: str, names: list[str]) -> str:
    return f"`{key}` does not belong to `{{found}}`: it is an argument of {_listed(names)}"


def _needed(key: str, names: list[str]) -> dict[str, Any]:
    verb = "needs" if len(names) == 1 else "need"
    return {"required": [key], "x-say": f"`{{missing}}` is missing: {_listed(names)} {verb} it"}


def _measure_in(names: list[str]) -> dict[str, Any]:
    return {"properties": {"measure": {"enum": names}}, "required": ["measure"]}


def _listed(names: list[str]) -> str:
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} and {names[-1]}"


def main() -> None:
    """Rewrite the lists in the schema of the checkout."""
    path = Path(str(files("specgate.schemas") / "specgate.schema.json"))
    path.write_text(rewritten(path.read_text(encoding="utf-8")), encoding="utf-8")


if __name__ == "__main__":
    main()
