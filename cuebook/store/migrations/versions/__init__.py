"""One module a revision, named by its number."""
