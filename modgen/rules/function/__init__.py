"""Whether the module does what the spec asks."""
