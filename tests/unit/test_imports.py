"""What an import may load: the command line answers at once."""

import subprocess
import sys

import pytest

HEAVY = ("pandas", "geopandas", "shapely", "folium", "matplotlib", "scipy", "pyproj", "typst")


@pytest.mark.parametrize(
    "code",
    [
        "import fieldplan",
        "import fieldplan.cli",
        "from click.testing import CliRunner; from fieldplan.cli import entry; "
        "assert CliRunner().invoke(entry, ['--help']).exit_code == 0",
    ],
)
def test_help_loads_no_heavy_library(code: str) -> None:
    """Help in a tenth of a second is what makes people read it."""
    check = f"{code}\nimport sys\nprint([m for m in {HEAVY!r} if m in sys.modules])"
    done = subprocess.run(
        [sys.executable, "-c", check], capture_output=True, text=True, check=True, timeout=60
    )
    assert done.stdout.strip() == "[]"


def test_size_with_bare_numbers_loads_no_table_or_map_library() -> None:
    """The first thing anybody tries is ``size`` with two numbers."""
    code = (
        "from click.testing import CliRunner; from fieldplan.cli import entry\n"
        "r = CliRunner().invoke(entry, ['size', '--sigma', '27.57', '--standard-error', '6'])\n"
        "assert r.exit_code == 0, r.output\n"
        "import sys\n"
        "heavy = ('pandas', 'geopandas', 'shapely', 'folium', 'matplotlib', 'scipy.stats')\n"
        "print([m for m in heavy if m in sys.modules])"
    )
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, check=True, timeout=60
    )
    assert done.stdout.strip() == "[]"
