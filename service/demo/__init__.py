"""The demo: a tune of our own, posted to a running service once for each shipped movement."""
