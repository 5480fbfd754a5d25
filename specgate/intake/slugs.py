"""What the intake can find wrong with the files: one row a slug, with the user's text.

Every one of them is of level error and makes the project unusable: nothing is computed and no report is written.
"""

from __future__ import annotations

from collections.abc import Mapping
from types import MappingProxyType

from specgate.terms.records import record


@record
class Slug:
    """A row: the slug, a title, and the text that `specgate explain` prints."""

    name: str
    title: str
    text: str


_ROWS = (
    Slug(
        "yaml-invalid",
        "File that cannot be read",
        "A file is not YAML 1.2 as specgate reads it: broken syntax, a tab, an alias, a tag, nesting or numbers "
        "beyond any sensible size, bytes that are not UTF-8; or an `include` names nothing, leaves the project folder "
        "or goes in a circle. Aliases and tags are refused on purpose: a reviewer must be able to read each value "
        "where it stands.",
    ),
    Slug(
        "schema-violation",
        "Shape that the format does not have",
        "A key, a type or a combination of keys is not one that the format knows, or a value lies outside what it may "
        "be. The message says what was found and what was wanted; `specgate schema` prints the format for editors.",
    ),
    Slug(
        "unit-unknown",
        "Unit that is not in the table",
        "Units come from a closed table of exact factors and from the project's own `units`. A unit that is not in "
        "either is refused, with the nearest one that is.",
    ),
    Slug(
        "dimension-mismatch",
        "Dimensions that do not fit",
        "The terms of a polynomial, a wire between two blocks, a limit and its measure, a sum: both sides must be of "
        "one dimension. Units of one dimension are converted, different dimensions never are. A frequency in 1/s is "
        "refused as well, for it leaves open whether cycles or radians are meant.",
    ),
    Slug(
        "name-unknown",
        "Name that nothing has",
        "A parameter, subsystem, signal, response, break, measure, approximation or template is named that does not "
        "exist. The message gives the nearest name that does.",
    ),
    Slug(
        "id-duplicate",
        "One name for two things",
        "Names are unique across all files of a project. The finding shows both places; neither wins.",
    ),
    Slug(
        "sign-ambiguous-limit",
        "Limit that a wrong sign would meet",
        "A one-sided limit on a signed measure is met by any value of the wrong sign: a minimum of -40 K is at most "
        "2 K. Say `within: d, of: v`, `between: [low, high]`, or limit `peak_deviation`.",
    ),
)

SLUGS: Mapping[str, Slug] = MappingProxyType({row.name: row for row in _ROWS})
