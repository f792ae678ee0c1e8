"""The command line: options in, one call, an answer and an exit status out."""
