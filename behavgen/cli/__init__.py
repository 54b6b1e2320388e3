"""The command line: one file a command; nothing else prints, parses arguments or exits."""
