"""Words that all rooms speak: places, findings, verdicts, quantities, units."""
