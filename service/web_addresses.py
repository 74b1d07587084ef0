"""Whom a connection counts for, where connections are counted by who sends them."""

import ipaddress
from functools import lru_cache
from typing import Any

IPV6_NETWORK_BITS = 64  # what one customer has at least (RFC 6177)


def address_of(client: Any) -> str:
    """Whom a connection counts for: an IPv4 address, or the network of an IPv6 one; empty for a local socket.

    Args:
        client: As the socket names its other end.
    """
    return _subscriber_of(str(client[0])) if isinstance(client, tuple) else ""


@lru_cache(maxsize=1024)  # most ask more than once
def _subscriber_of(text: str) -> str:
    try:
        address = ipaddress.ip_address(text.partition("%")[0])
    except ValueError:
        return text
    if isinstance(address, ipaddress.IPv4Address):
        return str(address)
    if address.ipv4_mapped is not None:
        return str(address.ipv4_mapped)
    return str(ipaddress.IPv6Network((int(address), IPV6_NETWORK_BITS), strict=False))
