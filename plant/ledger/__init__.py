"""How anything is kept: one Book a works, its Entries in a chain, and rows that are only ever added."""
