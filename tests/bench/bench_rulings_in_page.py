"""How long a ruling by hand takes for whoever makes it: from the click to the new disc drawn. Prints, never fails.

The demo tune on each shipped movement, in Debian's chromium. One projection after another is taken out, each found by
the arrow keys; the page asks for the best arrangement round the rulings, gets it, and draws the disc and what changed.
"""

import sys
import tempfile
from pathlib import Path
from statistics import median

from playwright.sync_api import Page, sync_playwright

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from layout.documents import shipped_movement_ids
from service.client.client import Client
from tests.bench.opponents.table import say, say_table
from tests.browser.driving import ARGUMENTS, NOT_THERE, chromium
from tests.browser.served import served
from tests.service.shop import TUNE

RULINGS = 12  # on each disc
STEPS = 7  # projections between two that are taken out
GOAL_MS = 1000.0
READY = "#rulings[data-ready]"
# From the click to the frame after the page says that it is done.
TAKE_OUT = """() => new Promise((done) => {
  const rulings = document.querySelector("#rulings");
  const from_ms = performance.now();
  let began = false;
  const look = () => {
    const isBusy = rulings.getAttribute("aria-busy") === "true";
    began = began || isBusy;
    if (began && !isBusy) requestAnimationFrame(() => done(performance.now() - from_ms));
    else requestAnimationFrame(look);
  };
  document.querySelector("#rule-out").click();
  look();
})"""


def main() -> None:
    """Measure, and print a table."""
    path = chromium()
    if path is None:
        say(NOT_THERE)
        return
    rows = []
    with (
        tempfile.TemporaryDirectory() as folder,
        served(Path(folder)) as service,
        sync_playwright() as playwright,
    ):
        browser = playwright.chromium.launch(executable_path=path, args=ARGUMENTS)
        for movement in shipped_movement_ids():
            made = Client(service.url).make_layout({"tune": TUNE}, {"movement": movement})
            page = browser.new_page()
            page.goto(f"{service.url}/discs/{made.json['fingerprint']}")
            page.wait_for_selector(READY)
            took_ms = sorted(_taken_out_ms(page, STEPS * (number + 1)) for number in range(RULINGS))
            rows.append((movement, f"{median(took_ms):.0f}", f"{took_ms[-1]:.0f}", f"{GOAL_MS:.0f}"))
        browser.close()
    say(f"{RULINGS} rulings on each disc, milliseconds from the click to the new disc drawn")
    say_table(("movement", "median", "worst", "goal"), rows)


def _taken_out_ms(page: Page, steps: int) -> float:
    """Take out the first projection that lies so many steps or more from the beginning of the turn."""
    page.focus("#stage")
    page.keyboard.press("Home")
    for _ in range(steps):
        page.keyboard.press("ArrowRight")
    while page.locator("#rule-out").count() == 0:
        page.keyboard.press("ArrowRight")
    return float(page.evaluate(TAKE_OUT))


if __name__ == "__main__":
    main()
