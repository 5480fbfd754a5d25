"""Loops with a sampled controller: at the samples and between them."""
