"""Two Reviews to Differences: what was changed, what that did downstream, and what got worse."""
