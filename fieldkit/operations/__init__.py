"""What the system does: one function an operation, one transaction each, no request objects.

Every operation that changes something takes an `Actor` first and checks the role itself, whatever page called it.
A Refusal's code decides the status that the web answers with (fieldkit.web.errors). Operations need an application
context for the database. To add one: a function in the module of its noun; state its role in the first line.
"""
