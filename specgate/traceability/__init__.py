"""The graph from need to requirement to evidence: facts, no findings."""
