"""The kit: all that a tablet takes to site, as a signed manifest of hashes and the bytes behind them.

The registers' form stands in DEVELOPERS.md, "Registers". What is in a kit depends only on what is stored and on the
formula files, so the same content has the same hash and is fetched once. Not here: making the control templates
(fieldkit.web.step_form), making the sums (sums.py).
"""

from __future__ import annotations

import hashlib
import json
from typing import Any

from fieldkit import units
from fieldkit.errors import Refusal
from fieldkit.operations import board, enrol, moment, people, procedures, registers, settings, sums
from fieldkit.operations.station import Station
from fieldkit.store.db import db, writing
from fieldkit.store.tables import Blob, SheetRow, Source
from fieldkit.trust import jws, keys

TYPE = "fieldkit-kit"
MIN_APP = "0.1.0"


def make(station: Station, controls: str) -> str:
    """The kit as it is now: a JWS over the manifest, by the receipt key. `controls` is the control templates' HTML."""
    blobs: list[dict[str, Any]] = []
    for one in procedures.released():
        blobs.append(_entry(f"sheet/{one.procedure}", one.sheet, "application/json", one.size))
        blobs.append(_entry(f"source/{one.procedure}", one.source, "application/yaml", one.source_size))
    made = {
        "registers": (_json(registers_now()), "application/json"),
        "controls": (controls.encode(), "text/html"),
    }
    if (formulas := sums.data()) is not None:
        made["sums"] = (formulas, "application/json")
    for name, (data, media) in made.items():
        blobs.append(_entry(name, _keep(data, media), media, len(data)))
    blobs.sort(key=lambda blob: str(blob["name"]))
    manifest = {
        "kit": hashlib.sha256(_json(blobs)).hexdigest(),
        "made": moment.text(),
        "store": settings.store_id(),
        "receipt_jwk": station.receipt_jwk,
        "authority": station.authority_pem,
        "blobs": blobs,
        "min_app": settings.get("min_app", MIN_APP),
    }
    return jws.sign(manifest, station.receipt, TYPE, kid=keys.thumbprint(station.receipt_jwk))


def registers_now() -> dict[str, Any]:
    """The `registers` blob as data."""
    cabinets = registers.cabinets()
    tubes = {
        serial: {
            "kind": tube.data.kind,
            "cabinet": tube.data.cabinet,
            "hours": tube.data.hours,
            "confirmed": tube.confirmed,
            "photograph": tube.photograph,
            "givens": tube.givens,
        }
        for serial, tube in registers.tubes().items()
    }
    boards = {name: {"locks": b.locks, "earths": b.earths} for name, b in board.boards(list(cabinets)).items()}
    return {
        "station": {"id": settings.store_id(), "name": settings.get("station")},
        "sites": {name: site.model_dump(mode="json") for name, site in registers.sites().items()},
        "cabinets": {name: cabinet.model_dump(mode="json") for name, cabinet in cabinets.items()},
        "tubes": tubes,
        "instruments": {name: one.model_dump(mode="json") for name, one in registers.instruments().items()},
        "people": _people(),
        "board": boards,
        "earlier": board.earlier(),
        "units": units.table(),
        "proved": {one.procedure: one.proved for one in procedures.released()},
    }


def _people() -> dict[str, Any]:
    made: dict[str, Any] = {
        p.id: {"name": p.name, "roles": list(p.roles), "certificates": []} for p in people.everyone() if p.active
    }
    for key in enrol.keys_of(usable=True):
        if key.person in made:
            made[key.person]["certificates"].append(key.certificate)
    return made


def blob(sha256: str) -> tuple[bytes, str]:
    """The bytes behind a hash of some kit, and their media type. Raises Refusal not-found."""
    kept = db.session.get(Blob, sha256)
    if kept is not None:
        return kept.data, kept.media
    sheet = db.session.get(SheetRow, sha256)
    if sheet is not None:
        return sheet.data, "application/json"
    source = db.session.get(Source, sha256)
    if source is not None:
        return source.data, "application/yaml"
    raise Refusal("not-found", "No kit of this station holds that.")


def _keep(data: bytes, media: str) -> str:
    digest = hashlib.sha256(data).hexdigest()
    if db.session.get(Blob, digest) is None:
        with writing() as session:
            if session.get(Blob, digest) is None:
                session.add(Blob(sha256=digest, media=media, data=data))
    return digest


def _entry(name: str, sha256: str, media: str, size: int) -> dict[str, Any]:
    return {"name": name, "sha256": sha256, "media": media, "size": size}


def _json(value: Any) -> bytes:
    return json.dumps(value, ensure_ascii=False, sort_keys=True, separators=(",", ":")).encode()
