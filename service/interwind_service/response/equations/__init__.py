"""From a numbered network to equations that can be solved: roles, trees, reduction, resolvent, state equations."""
