"""Run the command line as ``python -m fieldplan``."""

from fieldplan.cli import main

if __name__ == "__main__":
    main()
