"""Pure functions on values with frozen, typed results; no file, clock or environment."""
