"""Files -> Characterisation: readers, row-precise faults, summary."""
