"""What may happen to a vessel, one module a kind."""
