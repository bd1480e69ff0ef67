"""Formulas: text to tree (parse), tree to answer (evaluate), names and units (check), and the library of named ones."""
