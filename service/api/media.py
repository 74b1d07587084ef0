"""Which of the service's two faces a request asks for: data for programs, or pages for people."""

from flask import Request

HTML, OTHERS = "text/html", ("application/json", "application/problem+json")


def prefers_html(asked: Request) -> bool:
    """Whether HTML is wanted before JSON, as browsers say; not where anything will do."""
    return asked.accept_mimetypes.best_match((*OTHERS, HTML)) == HTML
