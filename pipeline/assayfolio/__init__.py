"""Assayfolio: planned one-way comparisons for testing laboratories."""
