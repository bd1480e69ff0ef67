"""The checks that verify makes, one function a question, in modules by what they look at.

A check takes the Subject and returns the sentence to say when the answer is yes; it raises Wrong, Unknown or Note
otherwise. To add one: a function here, one line in fieldkit.pdf.verify.CHECKS, a tamper case in tests/pdf.
"""
