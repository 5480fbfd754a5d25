"""One row per measure: its definition, unit, and how it is read off a subject."""
