"""One module a verb: it parses, calls and prints. Nothing heavy is imported before it runs."""
