"""Run the command line with ``python -m cuebook``."""

from cuebook.cli.main import main

if __name__ == "__main__":
    main()
