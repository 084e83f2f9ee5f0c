"""Water treatment chemistry as pure functions.

The promise of every module below:

* floats or numpy arrays in, the same shape out; text only where a name is asked for (a unit, a formula, a
  model);
* no clock, no web framework, no files other than the tables in ``chemistry/tables``;
* the unit stands in the name (``dose_mg_l``, ``level_m``) and in the docstring, with the valid range;
* outside its range a function raises :class:`chemistry.errors.OutOfRange`; it never returns a silent number;
* every formula and constant names its published source. What nobody opened says "from memory"; what is only
  habit says "common practice, no source".

Results are advice to a licensed person. Local law, the regulator and the product's own certificate always
win.
"""
