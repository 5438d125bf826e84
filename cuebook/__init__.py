"""Cuebook: find, log and review the words that steer movement."""

__version__ = "0.1.0"
