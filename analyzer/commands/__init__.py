"""Commands: one file a command, each with options(parser) and run(arguments)."""
