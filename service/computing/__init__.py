"""Layouts computed in a process of their own, so that who computes holds up nobody who wants what is at hand."""
