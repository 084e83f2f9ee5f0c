"""The sections of the report, one module each: a gathered month in, a section of plain data out."""
