"""Hooks: addresses that are told what happens to orders, as Standard Webhooks 1.0.0 says."""
