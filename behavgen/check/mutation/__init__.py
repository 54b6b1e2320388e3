"""Mutants of an emitted text, and whether the check catches them."""
