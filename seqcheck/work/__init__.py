"""Who does what of a lint: pieces that can be done apart, by this process, by several, or by several machines."""
