"""Movement metrics, one module a family, one registry. Pure."""
