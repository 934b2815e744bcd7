"""What the windings are connected to: numbering, stamps, structure and the system they make."""
