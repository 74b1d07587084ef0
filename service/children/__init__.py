"""Processes that compute for another: how they are started, spoken to, kept within memory, and ended."""
