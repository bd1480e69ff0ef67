"""procedures/REFERENCE.md is what the language's own models say of themselves. REWRITE=1 writes it again."""

from __future__ import annotations

import os
import re

from fieldkit.files import folder
from fieldkit.procedure import reference
from fieldkit.steps import KINDS, words


def test_the_reference_is_up_to_date() -> None:
    path = folder("procedures") / "REFERENCE.md"
    if os.environ.get("REWRITE"):
        path.write_text(reference.text())
    assert path.read_text() == reference.text()


def test_the_reference_names_every_kind_and_each_of_its_keys() -> None:
    text = reference.text()
    for word, kind in KINDS.items():
        assert re.search(rf"^### {word}$", text, re.M)
        assert all(f"- `{key}`" in text for key in words.keys_of(kind.model))
