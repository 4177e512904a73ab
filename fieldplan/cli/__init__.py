"""The command line: each command parses, calls one function and prints."""

import os
import signal
import sys
import textwrap
from collections.abc import Iterable
from contextlib import suppress
from importlib import import_module
from types import FrameType
from typing import NoReturn

import click

from fieldplan import __version__
from fieldplan.base.errors import FieldplanError

UNEXPECTED = (
    "This is a fault of fieldplan, not yours; nothing half-written was left. Run the command again "
    "with FIELDPLAN_TRACE=1 set and report what it prints"
)
STOPPED = "Stopped by Ctrl-C; nothing half-written was left."
COMMANDS: dict[str, dict[str, str]] = {
    "Every day": {
        "new": "Answer a few questions and get a campaign file.",
        "check": "Read a campaign file and say what is wrong or still to fill in.",
        "size": "Say how many locations the target needs.",
        "pack": "Write the packet for crew and office.",
        "issue": "Mark a packet as issued; it never changes again.",
        "estimate": "Meet laboratory results with their packet: mean and interval.",
    },
    "Look closer": {
        "locate": "Draw locations and look at them, without a packet.",
        "redraw": "Draw an old packet again from its record and compare.",
        "demo": "Run the whole job on an invented site.",
    },
}


def text_fault(word: str) -> str:
    """Say what is wrong with a typed word that no file can hold as text; nothing when it can.

    Examples
    --------
    >>> text_fault("Grün"), text_fault("Gr" + chr(0xDCFC) + "n")
    ('', "'Gr?n' has signs (at the ?) that are no UTF-8 text; type it anew, or rename the file.")
    """
    readable = word.encode("utf-8", errors="replace").decode("utf-8")
    if readable == word:
        return ""
    remedy = "type it anew, or rename the file."
    return f"'{readable}' has signs (at the ?) that are no UTF-8 text; {remedy}"


class CommandTable(click.Group):
    """A group that knows its commands by name and imports one only when it is called."""

    def parse_args(self, ctx: click.Context, args: list[str]) -> list[str]:
        """Refuse words that are no text before anything reads them."""
        for word in args:
            fault = text_fault(word)
            if fault:
                raise click.UsageError(fault, ctx)
        return super().parse_args(ctx, args)

    def list_commands(self, ctx: click.Context) -> list[str]:  # noqa: ARG002
        """Name all commands in the order of the job."""
        return [name for section in COMMANDS.values() for name in section]

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        """Import one command; None when there is none of that name."""
        if cmd_name not in self.list_commands(ctx):
            return None
        command: click.Command = import_module(f"fieldplan.cli.{cmd_name}").command
        return command

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:  # noqa: ARG002
        """Write the commands by section without importing any."""
        for title, section in COMMANDS.items():
            with formatter.section(title):
                formatter.write_dl(list(section.items()))


@click.group(cls=CommandTable, context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(__version__, prog_name="fieldplan")
def entry() -> None:
    """Plan field sampling from one campaign file: how many, where, and the mean at the end.

    Start with: fieldplan demo. Add --help to any command for its options.
    """


def main() -> None:
    """Run the command line; errors a person can mend become lines, never a traceback."""
    _prepare()
    stops = _noted_stops()
    try:
        code = entry.main(standalone_mode=False)
    except click.ClickException as fault:
        fault.show()
        sys.exit(fault.exit_code)
    except (click.Abort, KeyboardInterrupt):
        _leave([STOPPED], 1)
    except FieldplanError as fault:
        _leave(fault.problems, fault.exit_code)
    except OSError as fault:
        place = f"{fault.filename}: " if fault.filename else ""
        _leave([f"{place}{fault.strerror or fault}. What was written before stays as it is."], 1)
    except Exception as fault:
        if stops:  # a library that was loading made another error of the key
            _leave([STOPPED], 1)
        if os.environ.get("FIELDPLAN_TRACE"):
            raise
        _leave([f"{UNEXPECTED} ({type(fault).__name__}: {fault})."], 1)
    sys.exit(code if isinstance(code, int) else 0)


def _prepare() -> None:
    """Settle what a terminal or an environment may have set otherwise."""
    for stream in (sys.stdout, sys.stderr):
        reconfigure = getattr(stream, "reconfigure", None)
        if reconfigure is not None:
            reconfigure(encoding="utf-8", errors="replace")
    os.environ["MPLBACKEND"] = "Agg"
    if not os.environ.get("SOURCE_DATE_EPOCH", "0").isdigit():
        del os.environ["SOURCE_DATE_EPOCH"]


def _no_trace(*_fault: object) -> None:
    """Print nothing: what the key broke is answered in one line."""


def _noted_stops() -> list[int]:
    """Note every Ctrl-C before it is raised, in a list that grows."""
    stops: list[int] = []

    def note(number: int, frame: FrameType | None) -> None:
        stops.append(number)
        sys.excepthook = sys.unraisablehook = _no_trace  # of a module that was half loaded
        signal.default_int_handler(number, frame)

    if signal.getsignal(signal.SIGINT) is signal.default_int_handler:
        signal.signal(signal.SIGINT, note)
    return stops


def _leave(problems: Iterable[str], code: int) -> NoReturn:
    """Say what is wrong, one line a problem, and end."""
    with suppress(OSError):
        for problem in problems:
            click.echo(_for_reader(problem), err=True)
    sys.exit(code)


def _for_reader(problem: str) -> str:
    """Wrap a problem for a terminal, but no command to copy; others get it as it is."""
    if not sys.stderr.isatty():
        return problem
    return "\n".join(
        line
        if line.startswith("  fieldplan ")
        else textwrap.fill(line, width=79, break_long_words=False, break_on_hyphens=False)
        for line in problem.split("\n")
    )
