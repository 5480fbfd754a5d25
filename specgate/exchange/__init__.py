"""Machine-readable forms of a Review."""
