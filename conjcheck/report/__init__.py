"""One outcome in several dresses."""
