"""`fieldkit demo`: the invented station, filled and served, to look at and try; or one record, without a browser.

`--record DIR` plays a whole warm-up through the same operations and leaves the countersigned PDF and the signing
authority's certificate. Everything is invented; nothing here is data for a real tube. What is played: fieldkit.demo.
"""

from __future__ import annotations

import argparse
import datetime as dt
import json
import os
import sys
import tempfile
from pathlib import Path

from fieldkit.cli import serve
from fieldkit.demo import build
from fieldkit.demo.build import SignIns
from fieldkit.errors import Refusal

PORT = 8080
KEPT = "demonstration.json"


def arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--data", metavar="DIR", help="keep the demonstration here and go on with it next time")
    parser.add_argument("--host", default="127.0.0.1", help="address to listen on; any but this machine's own gets TLS")
    parser.add_argument("--port", type=int, default=PORT, help=f"port to listen on (default {PORT})")
    parser.add_argument("--record", metavar="DIR", help="play one warm-up, leave PDF and certificate here, stop")


def run(args: argparse.Namespace) -> int:
    """0 when it was stopped or the record was made; 1 when something refused, in words."""
    os.umask(0o077)
    try:
        if args.record:
            return _record(Path(args.record))
        if args.data:
            return _serve(Path(args.data).expanduser().resolve(), args, keep=True)
        with tempfile.TemporaryDirectory(prefix="fieldkit-demo-") as folder:
            return _serve(Path(folder), args, keep=False)
    except Refusal as bad:
        print(f"fieldkit demo: {bad.sentence} [{bad.code}]", file=sys.stderr)
        return 1


def _record(place: Path) -> int:
    """One countersigned warm-up and the authority's certificate in `place`; prints both paths."""
    place.mkdir(parents=True, exist_ok=True)
    now = dt.datetime.now(dt.UTC)
    with tempfile.TemporaryDirectory(prefix="fieldkit-demo-") as folder, build.opened(Path(folder)):
        demo = build.prepare(Path(folder), now, build.signs(), _say)
        tablet = build.tablet(demo, "demo-tablet-3", "tablet 3", now - dt.timedelta(hours=4))
        played = build.warm_up(demo, tablet)
        _say(f"run {played.run}: {played.state['seq'] + 1} events")
        pdf, certificate = place / f"{played.run}.pdf", place / "signing-authority.pem"
        pdf.write_bytes(build.countersign(demo, played.run))
        certificate.write_text(demo.held.authority_pem)
    print(pdf)
    print(certificate)
    return 0


def _say(text: str) -> None:
    print(f"  {text}", file=sys.stderr, flush=True)


def _fill(folder: Path) -> SignIns:
    """The whole demonstration: a countersigned record, one that waits, and an open run."""
    now, words = dt.datetime.now(dt.UTC), build.signs()
    print("Making the demonstration station, about half a minute:", file=sys.stderr)
    with build.opened(folder):
        demo = build.prepare(folder, now, words, _say)
        third = build.tablet(demo, "demo-tablet-3", "tablet 3", now - dt.timedelta(hours=5))
        warm = build.warm_up(demo, third)
        build.countersign(demo, warm.run)
        _say(f"{warm.run}, countersigned")
        third.clock.pass_by(12 * 60)
        climbed = build.bring_up(demo, third)
        _say(f"{climbed.run}, waiting for a supervisor")
        fourth = build.tablet(demo, "demo-tablet-4", "tablet 4", now - dt.timedelta(minutes=25))
        going = build.still_going(demo, fourth)
        _say(f"{going.run}, open")
    return words


def _serve(folder: Path, args: argparse.Namespace, keep: bool) -> int:
    folder.mkdir(mode=0o700, parents=True, exist_ok=True)
    kept = folder / KEPT
    if kept.exists():
        words = SignIns(**json.loads(kept.read_text()))
    else:
        words = _fill(folder)
        kept.write_text(json.dumps(words.__dict__))
    local = args.host in serve.LOOPBACK
    place = serve.Place(args.host, args.port, ("localhost",) if local else serve.own_names(args.host), plain=local)
    print(_words(place.url, words, keep, local), flush=True)
    serve.start(folder, place)
    return 0


def _words(url: str, words: SignIns, keep: bool, local: bool) -> str:
    lines = [
        "",
        f"Desk     {url}",
        f"Tablet   {url}app/",
        "",
        f"Sign in  {', '.join(words.logins)}; the password of each is: {words.password}",
        "         vell and arkle are technicians, quill and orme supervisors, orme also administers",
        f"Signing authority's passphrase, to issue certificates at the desk: {words.authority}",
        "",
        "The station, its people and every number are invented. Limits for real work come from the tube's own",
        "nameplate, and the maker's instructions, local codes and qualified practice come first.",
        "",
        "Kept in the folder you named." if keep else "Everything is gone when this stops; --data DIR keeps it.",
        "Stop with Ctrl-C.",
    ]
    return "\n".join(lines)
