"""The rules themselves: numbers and times in, breaches out. No database, no clock, no framework.

Every rule says which published rule it holds to, or that it is common practice.
"""
