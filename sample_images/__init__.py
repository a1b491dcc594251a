"""Sample charts of invented antennas with their known curves; shipped as `digitise.samples`."""
