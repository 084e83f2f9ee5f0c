"""Documents: photos of a gauge, certificates of a delivery. What was seen, kept as it came."""
