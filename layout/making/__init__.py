"""Making: what making one disc takes, from its cut plan and what the shop states."""
