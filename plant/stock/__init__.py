"""What came in and what was moved: deliveries and transfers. Facts only."""
