"""A port that nothing listens on."""

import socket


def free_port() -> int:
    """A port of the loopback address that was free a moment ago."""
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        port: int = probe.getsockname()[1]
        return port
