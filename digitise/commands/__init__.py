"""The commands, one module each, found by name: `add_arguments(parser)` and `run(args) -> exit status`."""
