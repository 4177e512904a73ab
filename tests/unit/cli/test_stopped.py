"""Ctrl-C at any moment: one line, no traceback, exit code 1."""

import os
import subprocess
import sys
from pathlib import Path

import pytest

from fieldplan.cli import STOPPED

ROOT = Path(__file__).parents[3]
WHILE_LOADING = """
import signal, sys
signal.signal(signal.SIGINT, signal.default_int_handler)  # jobs in the background ignore it
class Stop:
    def find_spec(self, name, path=None, target=None):
        if name == {name!r}:
            {stop}
sys.meta_path.insert(0, Stop())
sys.argv = ["fieldplan", "size", "--sigma", "20", "--standard-error", "4"]
from fieldplan.__main__ import main
main()
"""


PLAIN = "raise KeyboardInterrupt"
SWALLOWED = """
            try:
                signal.raise_signal(signal.SIGINT)
            except KeyboardInterrupt:
                raise ImportError("half loaded")
"""


@pytest.mark.parametrize(
    ("name", "stop"),
    [
        ("fieldplan.cli", PLAIN),
        ("click", PLAIN),
        ("fieldplan.cli.size", PLAIN),
        ("fieldplan.sizing.answer", PLAIN),
        ("fieldplan.sizing.answer", SWALLOWED),
    ],
)
def test_a_stop_while_a_module_loads_is_one_line(name: str, stop: str, tmp_path: Path) -> None:
    """The first tenths of a second are all loading; some libraries make an error of their own."""
    done = subprocess.run(
        [sys.executable, "-c", WHILE_LOADING.format(name=name, stop=stop)],
        capture_output=True,
        text=True,
        check=False,
        cwd=tmp_path,
        env={**os.environ, "PYTHONPATH": str(ROOT)},
    )
    assert done.returncode == 1
    assert done.stderr.strip() == STOPPED
    assert done.stdout == ""
    assert list(tmp_path.iterdir()) == []


def test_the_installed_command_starts_where_a_stop_is_met() -> None:
    """The script that an installer writes imports what pyproject names, before anything else."""
    assert 'fieldplan = "fieldplan.__main__:main"' in (ROOT / "pyproject.toml").read_text("utf-8")


@pytest.mark.parametrize(
    ("words", "code"),
    [
        (["--help"], 0),
        (["--version"], 0),
        (["nothing"], 2),
        (["size", "--nothing"], 2),
        (["size", "--sigma", "3"], 2),
        (["size", "--sigma", "1e9", "--standard-error", "0.001"], 1),
        (["size", "--sigma", "3", "--standard-error", "1"], 0),
    ],
)
def test_exit_codes_stand_as_they_are_promised(words: list[str], code: int) -> None:
    """2: typed wrong; 1: cannot be done; 0: neither. Checked on the whole program."""
    done = subprocess.run(
        [sys.executable, "-m", "fieldplan", *words], capture_output=True, text=True, check=False
    )
    assert done.returncode == code, done.stderr
    assert "Traceback" not in done.stderr
