"""The command line: one module a command, each with `arguments(parser)` and `run(args) -> exit code`. See main.py."""
