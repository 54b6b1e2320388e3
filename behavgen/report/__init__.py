"""The report page of a cell, from its model and its check alone."""
