"""The journal: SQLite through sqlite-utils; append, read, verify, project. The only code that knows SQL.

`journal.Journal` opens, appends and reads; `verify.verify` says what is wrong with a folder; `projections` makes the
lists that screens search; `forms` holds the values given and taken; `hashing.run` drives the engine's generators.
Other modules here are for these alone.
"""
