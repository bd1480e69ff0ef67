"""Where templates, static files and procedures are: beside the package in a checkout, inside it when installed."""

from __future__ import annotations

from pathlib import Path

_PACKAGE = Path(__file__).resolve().parent


def folder(name: str) -> Path:
    """The folder `name` ("templates", "static" or "procedures"). Raises FileNotFoundError naming both places."""
    inside, beside = _PACKAGE / "_files" / name, _PACKAGE.parent / name
    for place in (inside, beside):
        if place.is_dir():
            return place
    raise FileNotFoundError(f"fieldkit's {name} are neither in {inside} nor in {beside}; install fieldkit again")
