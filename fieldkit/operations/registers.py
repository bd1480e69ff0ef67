"""The registers: sites, cabinets, tubes, instruments. Loaded as a whole, and nameplates entered twice.

The form of the data stands in DEVELOPERS.md, "Registers". A nameplate counts only when a second person has entered the
same again and its photograph is here. Not here: the kit made of it (kit.py), the lock board (board.py).
"""

from __future__ import annotations

import json
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from pydantic import BaseModel, ConfigDict, ValidationError
from sqlalchemy import select
from sqlalchemy.orm import Session

from fieldkit.errors import Refusal
from fieldkit.operations import instruments as instruments_register
from fieldkit.operations import moment
from fieldkit.operations.actor import Actor, require
from fieldkit.run import events
from fieldkit.store.db import Model, db, writing
from fieldkit.store.tables import Cabinet, Instrument, Nameplate, Person, Picture, Site, Tube


class Register(BaseModel):
    model_config = ConfigDict(extra="forbid", frozen=True)


class EmergencyOff(Register):
    name: str
    where: str


class Telephone(Register):
    who: str
    number: str


class Card(Register):
    """What a person must find without a network: emergency off, telephone, first aid, nearest help."""

    emergency_off: tuple[EmergencyOff, ...]
    notes: tuple[str, ...] = ()
    telephone: tuple[Telephone, ...]
    first_aid: tuple[str, ...]
    nearest_help: str


Givens = dict[str, events.GivenValue]


class SiteData(Register):
    name: str
    card: Card
    givens: Givens = {}


class Point(Register):
    title: str
    sources: tuple[str, ...]


class Stick(Register):
    title: str
    point: str


class CabinetData(Register):
    site: str
    title: str
    sources: tuple[str, ...]
    places: dict[str, tuple[str, ...]]
    points: dict[str, Point]
    sticks: dict[str, Stick]
    meters: dict[str, str]
    givens: Givens = {}


class TubeData(Register):
    kind: str
    cabinet: str | None
    hours: str
    givens: Givens


class Registers(Register):
    """What `load` takes; whatever else a seed holds (people, board) is not a register."""

    model_config = ConfigDict(extra="ignore", frozen=True)
    sites: dict[str, SiteData]
    cabinets: dict[str, CabinetData]
    tubes: dict[str, TubeData]
    instruments: dict[str, events.Instrument]


def read(seed: Mapping[str, Any]) -> Registers:
    """The registers in `seed`. Raises Refusal bad-register naming the first place that is wrong."""
    tubes = {
        serial: {k: v for k, v in tube.items() if k not in ("confirmed", "photograph")}
        for serial, tube in dict(seed.get("tubes", {})).items()
    }
    instruments = {name: events.with_ranges(one) for name, one in dict(seed.get("instruments", {})).items()}
    try:
        return Registers.model_validate({**seed, "tubes": tubes, "instruments": instruments})
    except ValidationError as exc:
        first = exc.errors()[0]
        where = ".".join(str(p) for p in first["loc"])
        raise Refusal("bad-register", f"The registers are wrong at {where}: {first['msg']}.") from exc


def load(actor: Actor, seed: Mapping[str, Any]) -> None:
    """Put the registers in, or bring them up to date; nothing is removed. Administrator.

    Nameplates already entered are not touched, and none counts by being loaded. Raises Refusal bad-register.
    """
    require(actor, "administrator")
    made = read(seed)
    _check_references(made)
    with writing() as session:
        for site_id, site in made.sites.items():
            _put(session, Site, site_id, site)
        session.flush()
        for cabinet_id, cabinet in made.cabinets.items():
            _put(session, Cabinet, cabinet_id, cabinet, site=cabinet.site)
        session.flush()
        for serial, tube in made.tubes.items():
            _put(session, Tube, serial, tube, cabinet=tube.cabinet)
        for instrument_id, instrument in made.instruments.items():
            _put(session, Instrument, instrument_id, instruments_register.due(instrument))


def _check_references(made: Registers) -> None:
    for name, cabinet in made.cabinets.items():
        if cabinet.site not in made.sites:
            raise Refusal("bad-register", f"Cabinet {name} stands at {cabinet.site!r}, which is no site here.")
        for meter in cabinet.meters.values():
            if meter not in made.instruments:
                raise Refusal(
                    "bad-register", f"Cabinet {name} names the instrument {meter!r}, which is not in the register."
                )
        listed = [s for sources in cabinet.places.values() for s in sources]
        listed += [s for point in cabinet.points.values() for s in point.sources]
        for source in listed:
            if source not in cabinet.sources:
                raise Refusal("bad-register", f"Cabinet {name} maps {source!r}, which is none of its sources.")
    for name, instrument in made.instruments.items():
        wrong = instruments_register.wrong_with(name, instrument)
        if wrong:
            raise Refusal("bad-register", f"Instrument {name}: {wrong}.")
    for serial, tube in made.tubes.items():
        if tube.cabinet is not None and tube.cabinet not in made.cabinets:
            raise Refusal("bad-register", f"Tube {serial} is in {tube.cabinet!r}, which is no cabinet here.")


def _put(session: Session, table: type[Model], key: str, data: Register | events.Instrument, **more: Any) -> None:
    text = json.dumps(data.model_dump(mode="json"), ensure_ascii=False, sort_keys=True)
    row = session.get(table, key)
    if row is None:
        session.add(table(id=key, data=text, **more))
        return
    for name, value in {"data": text, **more}.items():
        setattr(row, name, value)


@dataclass(frozen=True)
class TubeLine:
    """A tube as the desk and the kit show it: the nameplate that counts, or the one on the way to it."""

    serial: str
    data: TubeData
    givens: dict[str, Any]
    confirmed: bool
    photograph: str | None
    waiting: Nameplate | None
    counts: Nameplate | None


def sites() -> dict[str, SiteData]:
    rows = db.session.scalars(select(Site).order_by(Site.id))
    return {row.id: SiteData.model_validate_json(row.data) for row in rows}


def cabinets() -> dict[str, CabinetData]:
    rows = db.session.scalars(select(Cabinet).order_by(Cabinet.id))
    return {row.id: CabinetData.model_validate_json(row.data) for row in rows}


def instruments() -> dict[str, events.Instrument]:
    rows = db.session.scalars(select(Instrument).order_by(Instrument.id))
    return {
        row.id: instruments_register.due(events.Instrument.model_validate(events.with_ranges(json.loads(row.data))))
        for row in rows
    }


def tubes() -> dict[str, TubeLine]:
    plates: dict[str, list[Nameplate]] = {}
    for plate in db.session.scalars(select(Nameplate).order_by(Nameplate.id)):
        plates.setdefault(plate.tube, []).append(plate)
    rows = db.session.scalars(select(Tube).order_by(Tube.id))
    return {row.id: _tube(row, plates.get(row.id, [])) for row in rows}


def tube(serial: str) -> TubeLine:
    """Raises Refusal not-found."""
    found = tubes().get(serial)
    if found is None:
        raise Refusal("not-found", f"There is no tube {serial!r} here.")
    return found


def _tube(row: Tube, plates: list[Nameplate]) -> TubeLine:
    data = TubeData.model_validate_json(row.data)
    counts = next((p for p in reversed(plates) if p.state == "counts"), None)
    waiting = next((p for p in reversed(plates) if p.state == "entered"), None)
    givens = {name: given.model_dump(mode="json") for name, given in data.givens.items()}
    if counts is not None:
        for name, value in json.loads(counts.values).items():
            givens[name] = {**value, "source": f"nameplate of {row.id}"}
    photograph = counts.photograph if counts else None
    return TubeLine(row.id, data, givens, counts is not None, photograph, waiting, counts)


Values = Mapping[str, Mapping[str, Any]]


def enter_nameplate(actor: Actor, serial: str, values: Values, photograph: str) -> int:
    """The first entry of a tube's nameplate, with the SHA-256 of its photograph; gives its number.

    `values`: name -> {"texts": [...], "unit"}, as typed. Technician, supervisor or administrator.
    An entry that was waiting is replaced. Raises Refusal not-found, no-photograph, empty-value.
    """
    require(actor, "technician", "supervisor", "administrator")
    text = _as_text(values)
    with writing() as session:
        if session.get(Tube, serial) is None:
            raise Refusal("not-found", f"There is no tube {serial!r} here.")
        if session.get(Picture, photograph) is None:
            raise Refusal("no-photograph", "A nameplate needs its photograph: without one it does not count.")
        for row in session.scalars(select(Nameplate).where(Nameplate.tube == serial, Nameplate.state == "entered")):
            row.state = "replaced"
        plate = Nameplate(
            tube=serial, values=text, photograph=photograph, entered_by=actor.id, entered=moment.text(), state="entered"
        )
        session.add(plate)
        session.flush()
        return plate.id


def confirm_nameplate(actor: Actor, serial: str, values: Values) -> None:
    """The second entry, by another person who has not seen the first. From now on it counts.

    Where the two differ neither stands, and the names that differ are said without the values: read the plate again.
    Raises Refusal nothing-entered, same-person, entries-differ (`names`).
    """
    require(actor, "technician", "supervisor", "administrator")
    text = _as_text(values)
    differ: list[str] = []
    with writing() as session:
        query = select(Nameplate).where(Nameplate.tube == serial, Nameplate.state == "entered")
        plate = session.scalar(query.order_by(Nameplate.id.desc()))
        if plate is None:
            raise Refusal(
                "nothing-entered", f"Nobody has entered the nameplate of {serial} yet; yours is the first entry."
            )
        if plate.entered_by == actor.id:
            raise Refusal(
                "same-person", "You made the first entry. Somebody else must read the plate and enter it again."
            )
        first, second = json.loads(plate.values), json.loads(text)
        differ = sorted(name for name in first.keys() | second.keys() if first.get(name) != second.get(name))
        plate.second_by, plate.second = actor.id, moment.text()
        if differ:
            plate.state, plate.note = "differs", "differ: " + ", ".join(differ)
        else:
            for row in session.scalars(select(Nameplate).where(Nameplate.tube == serial, Nameplate.state == "counts")):
                row.state = "replaced"
            plate.state = "counts"
    if differ:
        named = ", ".join(differ).replace("_", " ")
        says = f"The two entries differ in {named}. Neither stands: read the plate again and enter it anew."
        raise Refusal("entries-differ", says, names=differ)


def _as_text(values: Values) -> str:
    """One form of an entry, so that two can be compared: as typed, spaces at the ends taken off."""
    made = {}
    for name, value in sorted(values.items()):
        texts = [str(t).strip() for t in value["texts"]]
        if not texts or any(not t for t in texts):
            raise Refusal("empty-value", f"Enter {name}; leave nothing out.")
        made[name] = {"texts": texts, "unit": str(value.get("unit", ""))}
    if not made:
        raise Refusal("empty-value", "Enter the nameplate; nothing was given.")
    return json.dumps(made, ensure_ascii=False, sort_keys=True)


def names_of(people: set[str]) -> dict[str, str]:
    return {row.id: row.name for row in db.session.scalars(select(Person).where(Person.id.in_(people)))}
