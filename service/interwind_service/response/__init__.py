"""What then happens: in frequency, in time, in the periodic state, with the evidence for it."""
