"""What N coupled windings are."""
