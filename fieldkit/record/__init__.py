"""The record: what is said about a run, built from its sheet and events alone. Pure: no clock, no database, no HTML."""
