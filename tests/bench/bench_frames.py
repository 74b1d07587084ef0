"""How a disc of 2,000 projections comes into a browser and moves there: bytes, time to ready, times between frames."""

import logging
import os
import platform
import statistics
import sys
import tempfile
import threading
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass, replace
from pathlib import Path

from flask import Response, request, send_file
from playwright.sync_api import Browser, Page, sync_playwright
from werkzeug.serving import make_server

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from layout.hear import Asked, hear
from layout.write.wav import write_wav
from service.api.asking import open_to_all
from service.app import create_app
from service.pages.disc import disc_page
from service.pages.page_views import gives_page
from tests.bench.bench_hearing import crowded as crowded_performance
from tests.bench.opponents.table import say, say_table
from tests.browser.driving import ARGUMENTS, NOT_THERE, chromium, wait_until
from tests.service.conftest import parts_of
from tests.service.pages.discs_shown import crowded

PROJECTIONS = 2_000
MEASURED_MS = 4_000
LARGEST_KB = 300  # the first view, compressed
OPENED = 5  # times
WIDTH, HEIGHT = 1280, 900
# From the page's own clock, which begins with the navigation: when the scripts have drawn.
TELL_READY = """addEventListener("DOMContentLoaded", () => {
  const look = () => {
    if (document.querySelector("#stage[data-ready]")) document.documentElement.dataset.readyMs = performance.now();
    else requestAnimationFrame(look);
  };
  look();
});"""
BEGIN = """() => {
  const frames = (globalThis.frames_ms = []);
  globalThis.isCounting = true;
  let last_ms = null;
  const look = (now_ms) => {
    if (last_ms !== null) frames.push(now_ms - last_ms);
    last_ms = now_ms;
    if (globalThis.isCounting) requestAnimationFrame(look);
  };
  requestAnimationFrame(look);
}"""
END = "() => { globalThis.isCounting = false; return globalThis.frames_ms; }"


@dataclass(frozen=True, slots=True, kw_only=True)
class FirstView:
    """How a page came: what went over the wire, and when it was drawn."""

    kilobytes: float
    ready_ms: float


@contextmanager
def served(folder: Path) -> Iterator[str]:
    """Serve the page of the crowded disc with its sound; gives its address."""
    parts = parts_of(folder)
    app = create_app(parts.settings)
    disc = replace(crowded(PROJECTIONS), hearing={"disc": "/crowded.wav", "written": "/crowded.wav"})
    sound = folder / "crowded.wav"
    with sound.open("wb") as out:
        write_wav(hear(crowded_performance(disc.movement, PROJECTIONS), disc.movement, Asked()), out, bits=16)

    @app.get("/crowded")
    @gives_page
    @open_to_all
    def show() -> Response:
        return disc_page(request, disc)

    @app.get("/crowded.wav")
    @gives_page
    @open_to_all
    def play() -> Response:
        return send_file(sound, mimetype="audio/wav", conditional=True)

    server = make_server("127.0.0.1", 0, app, threaded=True)
    serving = threading.Thread(target=server.serve_forever)
    serving.start()
    try:
        yield f"http://127.0.0.1:{server.server_port}/crowded"
    finally:
        server.shutdown()
        serving.join()
        parts.store.close()


@contextmanager
def opened(browser: Browser, address: str) -> Iterator[tuple[Page, FirstView]]:
    """The page in a browser that keeps nothing from before."""
    context = browser.new_context(viewport={"width": WIDTH, "height": HEIGHT})
    page = context.new_page()
    page.add_init_script(TELL_READY)
    came: list[float] = []
    wire = context.new_cdp_session(page)
    wire.on("Network.loadingFinished", lambda told: came.append(told["encodedDataLength"]))
    wire.send("Network.enable")
    page.goto(address, wait_until="networkidle")
    wait_until(page, "document.documentElement.dataset.readyMs !== undefined")
    ready_ms = float(str(page.get_attribute("html", "data-ready-ms")))
    yield page, FirstView(kilobytes=sum(came) / 1000, ready_ms=ready_ms)
    context.close()


def playing(page: Page) -> None:
    page.click("#play")
    wait_until(page, "document.querySelector('#sound').currentTime > 0.3")
    page.evaluate(BEGIN)
    page.wait_for_timeout(MEASURED_MS)


def turning_by_hand(page: Page) -> None:
    x, y = _middle(page)
    page.mouse.move(x + 200, y)
    page.keyboard.down("Shift")
    page.mouse.down()
    page.evaluate(BEGIN)
    _go(page, [(x + 200 - step, y + 2 * step) for step in range(100)])
    page.mouse.up()
    page.keyboard.up("Shift")


def zooming(page: Page) -> None:
    page.mouse.move(*_middle(page))
    page.evaluate(BEGIN)
    for notch in range(60):
        page.mouse.wheel(0, -100 if notch % 24 < 12 else 100)
        page.wait_for_timeout(30)


def moving_it_near(page: Page) -> None:
    for _ in range(6):
        page.click("#nearer")
    x, y = _middle(page)
    page.mouse.move(x, y)
    page.mouse.down()
    page.evaluate(BEGIN)
    _go(page, [(x + 2 * step, y + step) for step in range(100)])
    page.mouse.up()


def pointing_on_the_disc(page: Page) -> None:
    x, y = _middle(page)
    page.evaluate(BEGIN)
    _go(page, [(x - 200 + 4 * step, y + step) for step in range(100)])


def pointing_on_the_chart(page: Page) -> None:
    page.locator("#chart-scroll").scroll_into_view_if_needed()
    box = page.locator("#chart-scroll").bounding_box()
    assert box is not None
    page.evaluate(BEGIN)
    _go(page, [(box["x"] + step * box["width"] / 100, box["y"] + 60 + step) for step in range(100)])


def playing_with_the_chart_at_its_widest(page: Page) -> None:
    page.fill("#chart-wide", "4")
    playing(page)


DEEDS: tuple[Callable[[Page], None], ...] = (
    *(playing, turning_by_hand, zooming, moving_it_near, pointing_on_the_disc, pointing_on_the_chart),
    playing_with_the_chart_at_its_widest,
)


def _middle(page: Page) -> tuple[float, float]:
    page.locator("#stage").evaluate("stage => stage.scrollIntoView({block: 'center'})")
    box = page.locator("#stage").bounding_box()
    assert box is not None
    return box["x"] + box["width"] / 2, box["y"] + box["height"] / 2


def _go(page: Page, places: list[tuple[float, float]]) -> None:
    for x, y in places:
        page.mouse.move(x, y)
        page.wait_for_timeout(16)


def _row(deed: Callable[[Page], None], page: Page) -> tuple[str, ...]:
    deed(page)
    frames_ms = sorted(page.evaluate(END))
    p50, p95 = statistics.median(frames_ms), frames_ms[int(0.95 * len(frames_ms))]
    figures = (f"{p50:.1f}", f"{p95:.1f}", f"{frames_ms[-1]:.1f}", f"{1000 * len(frames_ms) / sum(frames_ms):.0f}")
    return deed.__name__.replace("_", " "), str(len(frames_ms)), *figures


def main() -> None:
    """Measure, and print two tables; without a browser, say so."""
    path = chromium()
    if path is None:
        say(f"NO FRAMES ARE MEASURED: {NOT_THERE}")
        return
    logging.disable(logging.INFO)  # a line for each request
    with tempfile.TemporaryDirectory() as folder, served(Path(folder)) as address, sync_playwright() as playwright:
        browser = playwright.chromium.launch(executable_path=path, args=ARGUMENTS)
        say(f"{PROJECTIONS} projections and their sound, in a window of {WIDTH} x {HEIGHT} pixels")
        say(f"chromium {browser.version}, headless, drawn by the processor; frames by requestAnimationFrame")
        say(f"{platform.machine()}, {os.cpu_count()} cores, load of the machine {os.getloadavg()[0]:.1f}")
        views, rows = [], []
        for _ in range(OPENED):
            with opened(browser, address) as (_, view):
                views.append(view)
        for deed in DEEDS:
            with opened(browser, address) as (page, _):
                rows.append(_row(deed, page))
        browser.close()
    kilobytes, ready_ms = max(view.kilobytes for view in views), sorted(view.ready_ms for view in views)
    told = "met" if kilobytes < LARGEST_KB else "MISSED"
    say_table(
        ("first view", f"kB on the wire, goal below {LARGEST_KB}", "", "ready ms, median", "worst"),
        [("all that is loaded", f"{kilobytes:.0f}", told, f"{statistics.median(ready_ms):.0f}", f"{ready_ms[-1]:.0f}")],
    )
    say_table(("frames", "count", "p50 ms", "p95 ms", "worst ms", "a second"), rows)


if __name__ == "__main__":
    main()
