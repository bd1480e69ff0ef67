"""The PDF of a record: typeset, put together, sealed, countersigned, verified.

    record ─► typeset ─► assemble ─► seal ─► countersign ─► verify
             WeasyPrint   pikepdf    pyHanko   (in two requests)

Not here: what a record says (fieldkit.record), who may countersign (fieldkit.operations), keys (fieldkit.trust).
"""
