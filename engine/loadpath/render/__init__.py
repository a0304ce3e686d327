"""Formats: each a function from a `Document` to text. No renderer computes, and none knows of another."""
