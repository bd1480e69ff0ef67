"""Trust: keys, certificates, the signing authority, the TLS authority, JWS and receipts.

Two authorities, never one. The signing authority (authority.py) issues people and the seal; its key is held under
a passphrase. The TLS authority (tls.py) makes the server's certificate and can sign nothing else. Not here: what
a signature in a run covers (fieldkit.run, DEVELOPERS.md "Signatures"), and signing a PDF (fieldkit.pdf).
"""
