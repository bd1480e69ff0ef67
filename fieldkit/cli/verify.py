"""`fieldkit verify FILE [--ca CERT] [--json]`: may this record be relied on?

Exit 0 only when every answer holds; 1 otherwise, a damaged or foreign file included; 2 misuse. Works on any machine
with nothing but the file and the signing authority's certificate. Not here: the questions (fieldkit.pdf.verify).
"""

from __future__ import annotations

import argparse
import datetime as dt
import json
import sys
from pathlib import Path

from fieldkit.errors import Refusal
from fieldkit.pdf import verify


def arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", help="the record, a PDF")
    parser.add_argument("--ca", metavar="CERT", help="the station's signing authority's certificate (PEM)")
    parser.add_argument("--json", action="store_true", help="the answer for a program to read")


def run(args: argparse.Namespace) -> int:
    try:
        data = Path(args.file).read_bytes()
        authority = Path(args.ca).read_bytes() if args.ca else None
    except OSError as exc:
        print(f"fieldkit verify: {exc.filename} cannot be read: {exc.strerror}", file=sys.stderr)
        return 2
    try:
        report = verify.verify(data, authority, dt.datetime.now(dt.UTC))
    except Refusal as exc:
        print(f"fieldkit verify: {args.ca}: {exc.sentence}", file=sys.stderr)
        return 2
    print(json.dumps(report.to_json(), ensure_ascii=False, indent=1) if args.json else report.to_text())
    return 0 if report.holds else 1
