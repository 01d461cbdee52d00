"""The subcommands of ``plutonbook``, one module a subject; imported only when called."""
