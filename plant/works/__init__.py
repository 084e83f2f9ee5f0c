"""What the works is and is meant to do, by date; and who may do what there."""
