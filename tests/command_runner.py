"""Run commands in tests with stdout and stderr apart, on every supported click."""

from inspect import signature

from click.testing import CliRunner


def command_runner() -> CliRunner:
    """Return a runner that keeps the streams apart.

    click before 8.2 mixes them unless told not to; later versions took the word away.
    """
    if "mix_stderr" in signature(CliRunner).parameters:
        return CliRunner(mix_stderr=False)  # type: ignore[call-arg]
    return CliRunner()
