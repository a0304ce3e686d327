"""Formulas: from typed lines to statements and trees, and back to text."""
