"""The command line: each command parses, calls and shows; errors are caught once."""
