"""What requests may say and answers say, one module for each resource: what validates is what is documented."""
