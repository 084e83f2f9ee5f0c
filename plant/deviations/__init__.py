"""Limits crossed, who was told, what was done."""
