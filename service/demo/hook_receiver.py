"""An example of a receiver of hooks, of Python's standard library alone: copy it, and make it yours.

    HOOK_SECRET=whsec_… python hook_receiver.py 9000 inbox.sqlite

It takes a message only if its signature fits the secret and its time is within five minutes of now, keeps each id
once, and answers at once; the work is done later by whoever reads the inbox. Behind a proxy that ends TLS.
"""

import base64
import hashlib
import hmac
import os
import sqlite3
import sys
import time
from contextlib import closing
from http.server import BaseHTTPRequestHandler, HTTPServer

TOLERANCE_S = 300
MOST_BYTES = 20_000  # messages are smaller


def is_genuine(secret: str, headers: dict[str, str], body: bytes) -> bool:
    """Whether a message was signed with the secret, and within five minutes of now.

    Args:
        secret: As the service showed it: whsec_ and base64.
        headers: Names in small letters.
        body: The bytes as they came; JSON that was read and written again has another signature.
    """
    message_id, sent_at = headers.get("webhook-id", ""), headers.get("webhook-timestamp", "")
    if not message_id or not sent_at.isdecimal() or abs(time.time() - int(sent_at)) > TOLERANCE_S:
        return False
    key = base64.b64decode(secret.removeprefix("whsec_"))
    signed = f"{message_id}.{sent_at}.".encode() + body
    wanted = "v1," + base64.b64encode(hmac.new(key, signed, hashlib.sha256).digest()).decode()
    given = headers.get("webhook-signature", "").split(" ")  # two while a secret is being replaced
    return any(hmac.compare_digest(wanted.encode(), one.encode()) for one in given)


def keep_once(inbox: sqlite3.Connection, message_id: str, body: bytes) -> None:
    """Keep a message, unless its id was kept before: a message may come twice, and in any order."""
    with inbox:  # one transaction: after it the message is safe, and may be answered
        inbox.execute("CREATE TABLE IF NOT EXISTS inbox (id TEXT PRIMARY KEY, body TEXT, done INTEGER DEFAULT 0)")
        inbox.execute("INSERT OR IGNORE INTO inbox (id, body) VALUES (?, ?)", (message_id, body.decode()))


class Receiver(BaseHTTPRequestHandler):
    """Answers 204 for what is kept, 401 for what is not genuine: nothing that a stranger sends is looked into."""

    timeout = 10  # s; a sender that stalls must not hold up the others

    def do_POST(self) -> None:
        """Take one message."""
        length = self.headers.get("Content-Length", "")
        if not length.isdecimal() or int(length) > MOST_BYTES:
            self.send_error(413)
            return
        body = self.rfile.read(int(length))
        headers = {name.lower(): value for name, value in self.headers.items()}
        if not is_genuine(os.environ["HOOK_SECRET"], headers, body):
            self.send_error(401)
            return
        with closing(sqlite3.connect(sys.argv[2])) as inbox:
            keep_once(inbox, headers["webhook-id"], body)
        self.send_response(204)
        self.end_headers()


if __name__ == "__main__":
    HTTPServer(("127.0.0.1", int(sys.argv[1])), Receiver).serve_forever()
