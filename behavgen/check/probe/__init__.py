"""A short play to many instances of the module under check, with a look inside."""
