"""What was observed: readings of water, meters, vessels and feeders. Facts only."""
