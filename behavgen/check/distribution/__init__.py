"""Whether the random part of the module under check is distributed as it must be."""
