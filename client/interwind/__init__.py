"""interwind: the language both sides speak."""
