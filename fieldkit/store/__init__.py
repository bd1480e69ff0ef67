"""The database: engine and transactions (db), every table on one page (tables), fences, migrations."""
