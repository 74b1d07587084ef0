"""A browser that reaches one service alone, and fails a test for whatever goes wrong in a page."""

import os
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field
from pathlib import Path
from typing import Literal

import pytest
from playwright.sync_api import Browser, BrowserContext, ConsoleMessage, Page, Request, Route, sync_playwright

from tests.browser.doing import take_picture
from tests.browser.driving import ARGUMENTS, NOT_THERE, WITHIN_MS, chromium, wait_until
from tests.browser.pages_list import ShownPage
from tests.browser.served import Served, served
from tests.thorough import THOROUGH

__all__ = ["SCHEMES", "SHORTEST_PX", "SIZES", "Watch", "Window", "wait_until"]  # for tests
SIZES = {"wide": (1280, 900), "phone": (360, 740)}
SHORTEST_PX = 320  # of CSS; WCAG 2.2, 1.4.10: at this width nothing scrolls sideways
SCHEMES: tuple[Literal["light", "dark"], ...] = ("light", "dark")


@dataclass(kw_only=True)
class Watch:
    """What went wrong in the pages of a test.

    Attributes:
        found: Each in words.
        bears: Texts that are expected: a fault whose words hold one is none.
    """

    found: list[str] = field(default_factory=list)
    bears: list[str] = field(default_factory=list)

    def on_console(self, message: ConsoleMessage) -> None:
        if message.type in ("error", "warning"):  # breaches of the policy are told here too
            self.found.append(f"console {message.type}: {message.text}")

    def faults(self) -> list[str]:
        """Those that nobody expected."""
        return [fault for fault in self.found if not any(words in fault for words in self.bears)]


@dataclass(frozen=True, kw_only=True)
class Window:
    """Opens pages of the service."""

    service: Served
    context: BrowserContext
    watch: Watch

    def open(self, path: str, ready: str = "main") -> Page:
        """A page once its scripts have run."""
        page = self.context.new_page()
        page.goto(self.service.url + path.format(**self.service.places), wait_until="load")
        page.wait_for_selector(ready)
        return page

    def show(self, shown: ShownPage) -> Page:
        """A page of the list."""
        if shown.status != 200:
            self.watch.bears.append(f"status of {shown.status}")
        return self.open(shown.path, shown.ready)


# Of a package, not of the session: playwright's loop runs while it is open, and tests elsewhere run loops of their own.
@pytest.fixture(scope="package")
def browser() -> Iterator[Browser]:
    path = chromium()
    if path is None:
        if os.environ.get("CI") == "true":
            pytest.fail(NOT_THERE)
        pytest.skip(f"NO PAGE IS TRIED IN A BROWSER: {NOT_THERE}")
    with sync_playwright() as playwright:
        opened = playwright.chromium.launch(executable_path=path, args=ARGUMENTS)
        yield opened
        opened.close()


@pytest.fixture(scope="package")
def service(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Served]:
    with served(tmp_path_factory.mktemp("served")) as running:
        yield running


@pytest.fixture
def open_window(browser: Browser, service: Served) -> Iterator[Callable[..., Window]]:
    """Makes windows of a size and scheme; at the end nothing may have gone wrong in any of them."""
    made: list[Window] = []

    def window(*, size: str = "wide", scheme: str = "light", signed_in: bool = False, touch: bool = False) -> Window:
        width, height = SIZES[size]
        context = browser.new_context(
            viewport={"width": width, "height": height},
            color_scheme="dark" if scheme == "dark" else "light",
            reduced_motion="reduce",
            has_touch=touch,
            is_mobile=touch,
        )
        watch = Watch()
        context.set_default_timeout(WITHIN_MS)
        context.route("**/*", lambda route, request: _keep_inside(route, request, service.url, watch))
        context.on("console", watch.on_console)
        context.on("weberror", lambda error: watch.found.append(f"script error: {error.error}"))
        if signed_in:
            answer = context.request.post(f"{service.url}/sign-in", form={"key": service.key}, max_redirects=0)
            assert answer.status == 303, answer.text()
        made.append(Window(service=service, context=context, watch=watch))
        return made[-1]

    yield window
    faults = [fault for one in made for fault in one.watch.faults()]
    for one in made:
        one.context.close()
    assert faults == []


@pytest.fixture
def window(open_window: Callable[..., Window]) -> Window:
    """A wide one in light colours."""
    return open_window()


@pytest.fixture(scope="session")
def take_pictures() -> Callable[[Page, str], None]:
    """Takes pictures of a page in both colour schemes, in the thorough run alone: people look at them, no test does."""
    folder = Path(__file__).parent / "screenshots"

    def pictures_of(page: Page, name: str) -> None:
        folder.mkdir(exist_ok=True)
        for scheme in SCHEMES:
            page.emulate_media(color_scheme=scheme)
            take_picture(page, folder / f"{name}-{scheme}.png")

    return pictures_of if THOROUGH else lambda _page, _name: None


def _keep_inside(route: Route, request: Request, url: str, watch: Watch) -> None:
    if request.url.startswith((f"{url}/", "data:", "blob:")):
        route.continue_()
    else:
        watch.found.append(f"left the service: {request.url}")
        route.abort()
