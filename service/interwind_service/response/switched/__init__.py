"""Networks of switches and piecewise-linear branches, run exactly from event to event."""
