"""The command line: one module for each subcommand, and `main` as their table."""
