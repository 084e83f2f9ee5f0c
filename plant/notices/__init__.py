"""Telling people: the call list, and mail about deviations nobody has taken on."""
