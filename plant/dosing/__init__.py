"""From tanks, meters and statements to dose: daily totals, lots, use, dose per megalitre, need, and the comparison."""
