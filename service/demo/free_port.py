"""Says whether the service can listen on a port of this machine; run before the environment exists.

Only the standard library is used, and the file is run by its path: `python service/demo/free_port.py 8000`.
"""

import contextlib
import socket
import sys

LOOPBACK = "127.0.0.1"


def why_not_free(port: int) -> str | None:
    """Why nothing can listen on this port of the loopback address, or None where it is free.

    Args:
        port: 1 to 65535.
    """
    with contextlib.suppress(OSError), socket.create_connection((LOOPBACK, port), timeout=1):
        return f"port {port} is taken: another program listens on it"
    with socket.socket() as listener:
        listener.setsockopt(socket.SOL_SOCKET, socket.SO_REUSEADDR, 1)
        try:
            listener.bind((LOOPBACK, port))
        except OSError as refusal:
            return f"port {port} cannot be used ({refusal.strerror})"
    return None


def main() -> None:
    """Exit with 0 where the port given is free, with 1 and one line on stderr where it is not."""
    reason = why_not_free(int(sys.argv[1]))
    if reason is not None:
        sys.exit(f"{reason}; choose another one with PORT, e.g.  PORT=8001 sh service/up")


if __name__ == "__main__":
    main()
