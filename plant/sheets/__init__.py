"""Worked sheets: enter a water, see what comes of it, by which formula, from which source."""
