"""Schema revisions; they travel inside the program."""
