"""What the tool states about its own verdicts, wherever it speaks."""

CAUTIONS = (
    "Verdicts hold for the linear models as given, inside the stated linear ranges and for the stated inputs.",
    "They replace neither test nor hazard analysis.",
    "Where the failure of a loop can hurt someone, the applicable local codes and safety standards and the judgement "
    "of licensed or authorised engineers decide, not this tool.",
)
