"""Run the command line as ``python -m fieldplan``, or as ``fieldplan`` once it is installed."""

import sys


def main() -> None:
    """Run the command line; a key that stops it while it loads is answered in one line too."""
    try:
        from fieldplan.cli import main as run

        run()
    except KeyboardInterrupt:
        sys.exit("Stopped by Ctrl-C; nothing half-written was left.")


if __name__ == "__main__":
    main()
