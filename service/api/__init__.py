"""The HTTP API: one blueprint per resource, problem details for everything that goes wrong."""
