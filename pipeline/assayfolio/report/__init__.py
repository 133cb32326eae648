"""Findings as a PDF: content, figures, pages, the file itself. No arithmetic on data."""
