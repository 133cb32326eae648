"""Worksheets: the planned measuring order, and how what was measured compares with it."""
