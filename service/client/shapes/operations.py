"""What is sent and told: operations. Written by generate.py from the API document; not to be changed by hand."""

from typing import TypedDict


class ReadyAnswer(TypedDict):
    """That the service can serve."""

    status: str
    parts: dict[str, str]
