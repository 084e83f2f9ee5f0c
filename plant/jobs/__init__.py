"""Work done later. The row is the truth; a message, where there is a broker, only wakes somebody up."""
