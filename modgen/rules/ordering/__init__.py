"""Whether the parts can be ordered and placed."""
