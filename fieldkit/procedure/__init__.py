"""Procedures: what a writer wrote, checked and compiled to a sheet."""
