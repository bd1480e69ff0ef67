"""A tablet of the demonstration: it makes events as a real one does, and hands them to the server's own operations.

Keys, chain, signatures and receipts are real; only the screen and the clock are not. The clock is set by whoever
plays and goes on by stated seconds. Not here: what is answered (play.py), and what the meters show (readings.py).
"""

from __future__ import annotations

import datetime as dt
import hashlib
from dataclasses import dataclass, field
from typing import Any

from fieldkit import __version__
from fieldkit.errors import Refusal
from fieldkit.operations import devices, enrol, kit, procedures, sync
from fieldkit.operations.actor import HOUSE
from fieldkit.operations.station import Station
from fieldkit.run import decide, events, progress
from fieldkit.run import state as folding
from fieldkit.run.names import Context, context
from fieldkit.trust import certificates, jws, keys

Plain = dict[str, Any]
LOCAL = dt.timezone(dt.timedelta(hours=1))


@dataclass
class Clock:
    """Wall and running timer of the tablet; `pass_by` lets seconds go."""

    wall: dt.datetime
    mono: int = 40_000
    boot: str = "demo-boot"

    def pass_by(self, seconds: float) -> None:
        self.wall += dt.timedelta(seconds=seconds)
        self.mono += round(seconds * 1000)

    def now(self) -> Plain:
        text = self.wall.astimezone(LOCAL).isoformat(timespec="milliseconds")
        return {"wall": text, "mono": str(self.mono), "boot": self.boot}


@dataclass
class Tablet:
    """An enrolled tablet with its people's keys."""

    station: Station
    clock: Clock
    device: str = "demo-tablet-3"
    name: str = "tablet 3"
    key: keys.PrivateKey = field(default_factory=keys.new)
    people: dict[str, keys.PrivateKey] = field(default_factory=dict)
    certificates: dict[str, list[Any]] = field(default_factory=dict)

    def enrol(self, login: str, password: str, authority_passphrase: str, at: dt.datetime) -> None:
        """Ask as the tablet asks, and issue as an administrator does."""
        key = keys.new()
        claims = {"device": self.device, "nonce": devices.challenge(self.station)}
        proof = jws.sign(claims, key, enrol.PROOF)
        device = {"id": self.device, "name": self.name, "jwk": keys.to_jwk(self.key.public_key())}
        jwk = keys.to_jwk(key.public_key())
        asked, person = enrol.ask(self.station, login, password, "demonstration", device, jwk, proof)
        enrol.issue(HOUSE, self.station, asked, authority_passphrase, "invented person of the demonstration", at)
        status = enrol.status(self.station, asked, self.device)
        self.people[person] = key
        self.certificates[person] = [certificates.from_pem(status.certificate), certificates.from_pem(status.authority)]

    def run(self, run: str, procedure: str) -> Run:
        """A new run on the released edition of `procedure`."""
        edition = next(one for one in procedures.released() if one.procedure == procedure)
        sheet, _, _ = procedures.sheet(edition.sheet)
        chain = f"{self.device}.{hashlib.sha256(run.encode()).hexdigest()[:8]}"
        ctx = context(sheet)
        return Run(self, ctx, edition.sheet, run, chain, folding.new(ctx, run, chain, edition.sheet))


@dataclass
class Run:
    """One run on the tablet: its chain as bytes and its state."""

    tablet: Tablet
    sheet: Context
    sha256: str
    run: str
    chain: str
    state: Plain
    texts: list[str] = field(default_factory=list)
    folded: folding.Run | None = None
    pictures: dict[str, bytes] = field(default_factory=dict)

    def progress(self) -> Plain:
        return progress.progress(self.sheet, self.state, self.tablet.clock.now())

    def command(self, by: str, **asked: Any) -> None:
        """Decide and record. Raises Refusal as the tablet would say it."""
        now = self.tablet.clock.now()
        answer = decide.decide(self.sheet, self.state, {"by": by, **asked}, now)
        if "refused" in answer:
            raise Refusal(answer["refused"]["code"], answer["refused"]["says"])
        for event in answer["events"]:
            self._append(event["kind"], event["body"], by)

    def sign(self, person: str, meaning: str, statement: str) -> None:
        """The person's signature over the head, with every picture so far."""
        tablet, now = self.tablet, self.tablet.clock.now()
        payload = {
            "run": self.run,
            "chain": self.chain,
            "seq": self.state["seq"],
            "head": self.state["head"],
            "sheet": self.sha256,
            "meaning": meaning,
            "person": person,
            "name": next(p["name"] for p in self.state["started"]["people"] if p["id"] == person),
            "time": now["wall"],
            "statement": statement,
            "pictures": sorted(self.pictures),
        }
        token = jws.sign(payload, tablet.people[person], "fieldkit-signature", x5c=tablet.certificates[person])
        self._append("signed", {"person": person, "meaning": meaning, "jws": token}, person)

    def _append(self, kind: str, body: Plain, by: str) -> None:
        made = events.next_event(self.state, kind, body, by, self.tablet.clock.now(), __version__)
        text = events.to_text(made)
        self.texts.append(text)
        self.folded = folding.apply(self.folded or folding.begin(self.sheet), events.parse(text.encode()))
        self.state = self.folded.state

    def send(self) -> None:
        """All that the server does not have yet, pictures last; raises Refusal where anything was not accepted."""
        tablet = self.tablet
        device = next(one for one in devices.everything() if one.id == tablet.device)
        have, _ = sync.head(self.run, self.chain)
        done = sync.accept(tablet.station, device, self.run, self.chain, self.texts[have + 1 :])
        for kept in done.kept:
            raise Refusal(kept.code, kept.says)
        for sha256, data in self.pictures.items():
            sync.picture(tablet.station, device, sha256, data)


def _spare(names: set[str], registers: Plain) -> set[str]:
    """Hand instruments that read the same as one that the sheet names."""
    built_in = {one for cabinet in registers["cabinets"].values() for one in cabinet["meters"].values()}
    hand = {name: one["reads"] for name, one in registers["instruments"].items() if name not in built_in}
    reads = {hand[name] for name in names if name in hand}
    return {name for name, what in hand.items() if what in reads}


def start_body(run: Run, *, cabinet: str, tube: str, present: tuple[str, ...]) -> Plain:
    """The body of `run-started`, gathered from the registers as the tablet gathers it from its kit."""
    registers, sheet = kit.registers_now(), run.sheet.sheet
    cab, plate = registers["cabinets"][cabinet], registers["tubes"][tube]
    site = registers["sites"][cab["site"]]
    origin = {"tube": plate["givens"], "cabinet": cab["givens"], "site": site["givens"]}
    meters = [m for step in sheet["steps"] if (m := step["control"].get("meter") or step["control"].get("tester"))]
    wanted = {m["instrument"] or cab["meters"][m["role"]] for m in meters}
    wanted |= _spare({m["instrument"] for m in meters if m["instrument"]}, registers)
    people = [{"id": key, "name": p["name"], "roles": p["roles"]} for key, p in registers["people"].items()]
    device = run.tablet
    return {
        "sheet": run.sha256,
        "procedure": sheet["procedure"],
        "edition": sheet["edition"],
        "site": cab["site"],
        "site_name": site["name"],
        "cabinet": cabinet,
        "tube": tube,
        "givens": {g["name"]: origin[g["origin"]][g["name"]] for g in sheet["givens"]},
        "meters": cab["meters"],
        "instruments": [registers["instruments"][name] for name in sorted(wanted)],
        "places": cab["places"],
        "people": people,
        "present": list(present),
        "locks": registers["board"][cabinet]["locks"],
        "earths": registers["board"][cabinet]["earths"],
        "earlier": registers["earlier"].get(tube, []),
        "tablet": {"device": device.device, "name": device.name, "installed": True, "persisted": True, "probe": "ok"},
        "kit": hashlib.sha256(run.sha256.encode()).hexdigest(),
    }
