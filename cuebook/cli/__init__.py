"""The command line: plain twin of every job."""
