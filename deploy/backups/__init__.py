"""Back-ups: every row of the database and every document in one file, checked by restoring it.

The file is a gzipped tar of JSON lines, one member a table, so it belongs to no database: what was saved from SQLite can
be restored into PostgreSQL and the other way round, and it can be read without this program.
"""
