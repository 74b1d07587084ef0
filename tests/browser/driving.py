"""How Debian's chromium is started and waited for, in tests and in the bench."""

import shutil
import time

from playwright.sync_api import Error, Page

ARGUMENTS = (
    *("--headless", "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run"),
    *("--disable-background-networking", "--disable-component-update", "--disable-sync"),
    "--autoplay-policy=no-user-gesture-required",
)
NOT_THERE = "chromium is not on the PATH (Debian: apt-get install chromium)"
WITHIN_MS = 30_000.0


def chromium() -> str | None:
    """Where chromium is; None where it is not."""
    return shutil.which("chromium")


def wait_until(page: Page, holds: str) -> None:
    """Wait until an expression of scripts holds. What playwright has for it needs an eval, which our pages forbid."""
    until_s = time.monotonic() + WITHIN_MS / 1000
    while not _holds(page, holds):
        assert time.monotonic() < until_s, f"it never holds that {holds}"
        page.wait_for_timeout(50)


def _holds(page: Page, holds: str) -> bool:
    try:
        return bool(page.evaluate(holds))
    except Error as error:
        if "context was destroyed" not in str(error):  # as it is while a page gives way to the next
            raise
        return False
