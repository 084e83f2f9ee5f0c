"""The door for machines: a control system or a laboratory pushes readings, others read comparison, deviations and reports.

It stands above the other doors, since it takes through intake's and reads what reports has issued.
"""
