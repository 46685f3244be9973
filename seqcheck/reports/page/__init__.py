"""The page for a design review."""
