"""The part that thinks."""
