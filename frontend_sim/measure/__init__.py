"""Numbers and verdicts: of a chain before any run, and of samples or codes after it."""
