"""Characterise the module under check anew, in simulation, and hold it against its tables."""
