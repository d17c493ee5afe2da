"""Pictures of the HTML pages for those who work on their looks: desktop and phone, light and dark, and as printed.

    .venv/bin/python scripts/screenshot.py structures_demo/calcite.cif --output demo_output/looks
    .venv/bin/python scripts/screenshot.py structures_demo/calcite.cif --plan

Needs Chromium (`--browser` names it), pillow, and pdftoppm for the printed pages. Each structure gives
NAME-desktop-light.png, -desktop-dark, -phone-light, -phone-dark and NAME-print-1.png, -2, ..., of the report or, with
--plan, of the run sheet (NAME-plan-...).
"""

from __future__ import annotations

import argparse
import shutil
import subprocess
import sys
import tempfile
from html import escape
from pathlib import Path

QUIET = (
    "--headless", "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run",
    "--disable-background-networking", "--disable-component-update", "--disable-sync", "--hide-scrollbars",
)  # fmt: skip
WIDTHS = {"desktop": 1280, "phone": 390}
SCHEMES = {"dark": 0, "light": 1}
TALLEST = 9000
NARROWEST_WINDOW = 600


def main() -> int:
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("structures", nargs="+", type=Path)
    parser.add_argument("--output", type=Path, default=Path("demo_output/looks"))
    parser.add_argument("--browser", default="chromium")
    parser.add_argument("--plan", action="store_true", help="the run sheet in the place of the report")
    arguments = parser.parse_args()
    if shutil.which(arguments.browser) is None:
        print(f"There is no program '{arguments.browser}': install Chromium or use --browser.", file=sys.stderr)
        return 2
    arguments.output.mkdir(parents=True, exist_ok=True)
    for structure in arguments.structures:
        name = f"{structure.stem}-plan" if arguments.plan else structure.stem
        page = run_sheet(structure) if arguments.plan else report(structure)
        for picture in pictures(name, page, arguments.output, arguments.browser):
            print(picture)
    return 0


def report(structure: Path) -> str:
    import sitesym
    from sitesym.views.html import page

    return page(sitesym.analyse(sitesym.read(str(structure))))


def run_sheet(structure: Path) -> str:
    import sitesym
    from sitesym.views.plan_html import render

    analysis = sitesym.analyse(sitesym.read(str(structure)))
    return render(sitesym.plan(analysis, curves=["001"], lasers=[532]))


def pictures(name: str, page: str, folder: Path, browser: str) -> list[Path]:
    written = folder / f"{name}.html"
    written.write_text(page, encoding="utf-8")
    made = [
        screen(written, folder / f"{name}-{device}-{scheme}.png", browser, width, number)
        for device, width in WIDTHS.items()
        for scheme, number in SCHEMES.items()
    ]
    return made + printed(written, folder / f"{name}-print", browser)


def screen(written: Path, target: Path, browser: str, width: int, scheme: int) -> Path:
    """The page in a frame of exactly this width: a window of its own may not be as narrow as a phone."""
    with tempfile.TemporaryDirectory() as profile:
        frame = Path(profile) / "frame.html"
        frame.write_text(
            f'<body style="margin:0"><iframe src="{escape(written.resolve().as_uri())}" width="{width}" '
            f'height="{TALLEST}" style="border:0;display:block"></iframe>',
            encoding="utf-8",
        )
        window = f"--window-size={max(width, NARROWEST_WINDOW)},{TALLEST}"
        colours = f"--blink-settings=preferredColorScheme={scheme}"
        run(browser, profile, window, colours, f"--screenshot={target.resolve()}", frame.as_uri())
    crop(target, width)
    return target


def printed(written: Path, target: Path, browser: str) -> list[Path]:
    """The page as PDF, and each sheet as a picture."""
    sheet = target.with_suffix(".pdf")
    with tempfile.TemporaryDirectory() as profile:
        run(browser, profile, f"--print-to-pdf={sheet.resolve()}", "--no-pdf-header-footer", written.resolve().as_uri())
    if shutil.which("pdftoppm") is None:
        print("There is no pdftoppm: the printed pages stay a PDF.", file=sys.stderr)
        return [sheet]
    subprocess.run(["pdftoppm", "-r", "80", "-png", str(sheet), str(target)], check=True)
    return sorted(target.parent.glob(f"{target.name}-*.png"))


def run(browser: str, profile: str, *arguments: str) -> None:
    command = [browser, *QUIET, f"--user-data-dir={profile}/profile", *arguments]
    subprocess.run(command, check=True, timeout=120, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)


def crop(picture: Path, width: int) -> None:
    """Cut off what lies right of the frame and the empty rest below the page."""
    from PIL import Image, ImageChops

    whole = Image.open(picture).convert("RGB").crop((0, 0, width, TALLEST))
    empty = Image.new("RGB", whole.size, whole.getpixel((width - 1, TALLEST - 1)))
    box = ImageChops.difference(whole, empty).getbbox()
    whole.crop((0, 0, width, min(TALLEST, (box[3] if box else TALLEST) + 30))).save(picture)


if __name__ == "__main__":
    sys.exit(main())
