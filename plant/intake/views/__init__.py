"""The pages of the door: the round, a reading, deliveries and transfers, bringing in files."""
