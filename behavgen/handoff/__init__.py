"""The package that others verify with: from the model, its emitted files and its check alone."""
