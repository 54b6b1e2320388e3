"""Hold emitted models against the reference: stimulus, agreement, verdict."""
