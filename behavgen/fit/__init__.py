"""Characterisation -> ComparatorModel: one file a quantity, surfaces, diagnosis."""
