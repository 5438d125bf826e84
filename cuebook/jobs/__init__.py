"""The use-cases that join the core and the store."""
