"""Many cells against what they were: what moved, and whether it matters."""
