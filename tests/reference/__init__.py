"""Published reference values, each with where it comes from and how it was confirmed."""
