"""Converters built from a packed model, and what they say about it."""
