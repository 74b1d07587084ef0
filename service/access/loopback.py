"""Whether a name or an address is this machine's own."""

import ipaddress
from functools import lru_cache


@lru_cache(maxsize=256)  # asked of every request, and there are few hosts
def is_loopback(host: str) -> bool:
    """Whether only this machine itself can be meant: localhost, 127.0.0.0/8 or ::1 (RFC 6761 section 6.3, RFC 6890).

    Args:
        host: A name or an address, without a port, an IPv6 address with or without brackets.
    """
    plain = host.removeprefix("[").removesuffix("]").rstrip(".").lower()
    if plain == "localhost" or plain.endswith(".localhost"):
        return True
    try:
        return ipaddress.ip_address(plain).is_loopback
    except ValueError:
        return False
