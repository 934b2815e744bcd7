"""Networks with smooth laws, run by a Rosenbrock method."""
