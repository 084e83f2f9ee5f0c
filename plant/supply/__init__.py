"""How long what is there will last, and when to order."""
