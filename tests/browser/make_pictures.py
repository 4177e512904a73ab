"""Make the README's pictures from what the tool draws today.

Run from a checkout with the test extra and Chromium: ``python -m tests.browser.make_pictures``.
"""

import shutil
import sys
import tempfile
from pathlib import Path

from fieldplan.cli import entry
from tests.browser.chromium import Screen, open_page
from tests.command_runner import command_runner

PICTURES = Path(__file__).parents[2] / "docs" / "pictures"
SHEET = Screen(820, 1100)


def draw_pictures(folder: Path) -> dict[str, Path]:
    """Run the demo in a passing folder and picture its pages.

    Parameters
    ----------
    folder : Path
        Receives ``map.png``, ``plan_sheet.png``, ``results_sheet.png`` and ``screen_map.png``.
    """
    with tempfile.TemporaryDirectory() as name:
        outcome = command_runner().invoke(entry, ["demo", "hobbin-ley", "--out", name, "--quiet"])
        if outcome.exit_code:
            raise SystemExit(outcome.output)
        site = Path(name) / "hobbin-ley"
        packet = site / "HL-r01"
        pages = {
            "plan_sheet.png": packet / "office" / "plan_sheet.html",
            "results_sheet.png": site / "HL-r01-results-01" / "results_sheet.html",
            "screen_map.png": packet / "crew" / "HL-r01-map.html",
        }
        for picture, page in pages.items():
            with open_page(page, SHEET) as opened:
                opened.screenshot(folder / picture)
        shutil.copyfile(packet / "crew" / "HL-r01-map.png", folder / "map.png")
    return {path.name: path for path in folder.glob("*.png")}


if __name__ == "__main__":
    PICTURES.mkdir(exist_ok=True)
    sys.stdout.write("\n".join(sorted(draw_pictures(PICTURES))) + "\n")
