"""What to measure next, by Fisher information: from a model or a rough guess, and wanted intervals.

Everywhere a wanted or promised interval is given by half its width, ``(high - low) / 2``.
"""
