"""The command line: one command a file, each imported when it is the one asked for."""
