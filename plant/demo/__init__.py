"""An invented works with an invented history, so that every screen has something true to show.

The simulator (simulate.py) knows what really happened: masses in tanks, flows, the water. What it hands out is what
people would have read and written down, with the errors of gauges and of people. Nothing in it is data of a real works.
"""
