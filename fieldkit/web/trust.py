"""How a tablet is made to trust this server: the TLS authority's certificate, its fingerprint, and what to press.

Also the signing authority's certificate, which `fieldkit verify` is given. Not here: making either (fieldkit.trust).
"""

from __future__ import annotations

from flask import Blueprint, Response, abort, render_template
from flask.typing import ResponseReturnValue

from fieldkit.trust import certificates, tls
from fieldkit.web.app import here
from fieldkit.web.security import public

blueprint = Blueprint("trust", __name__)


@blueprint.get("/trust")
@public
def page() -> ResponseReturnValue:
    path = here().tls / tls.AUTHORITY
    authority = certificates.from_pem(path.read_bytes()) if path.exists() else None
    signing = here().authority_pem
    return render_template(
        "trust/page.html",
        fingerprint=tls.fingerprint(authority) if authority else "",
        until=f"{authority.not_valid_after_utc:%-d %b %Y}" if authority else "",
        signing=tls.fingerprint(certificates.from_pem(signing.encode())) if signing else "",
    )


@blueprint.get("/trust/tls-authority.crt")
@public
def tls_authority() -> Response:
    """DER, with the media type that opens a tablet's own dialogue for certificates."""
    path = here().tls / tls.AUTHORITY
    if not path.exists():
        abort(404)
    data = certificates.to_der(certificates.from_pem(path.read_bytes()))
    response = Response(data, content_type="application/x-x509-ca-cert")
    response.headers["Content-Disposition"] = 'attachment; filename="fieldkit-tls-authority.crt"'
    return response


@blueprint.get("/trust/signing-authority.pem")
@public
def signing_authority() -> Response:
    pem = here().authority_pem
    if not pem:
        abort(404)
    response = Response(pem, content_type="application/x-pem-file")
    response.headers["Content-Disposition"] = 'attachment; filename="signing-authority.pem"'
    return response
