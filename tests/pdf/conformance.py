"""Asks veraPDF, in a process of its own because it needs a Java machine: `conformance.py JAR FILE...`, JSON out."""

from __future__ import annotations

import json
import sys

import jpype
import jpype.imports

JAVA = "/usr/share/java"
BESIDE = ("jaxb-api", "jaxb-runtime", "jaxb-core", "istack-commons-runtime", "javax.activation", "txw2")


def main(jar: str, paths: list[str]) -> dict[str, dict[str, list[str]]]:
    """File -> flavour -> the rules that it breaks."""
    jpype.startJVM(classpath=[jar, *(f"{JAVA}/{name}.jar" for name in BESIDE)])
    jpype.JClass("org.verapdf.gf.foundry.VeraGreenfieldFoundryProvider").initialise()
    foundry = jpype.JClass("org.verapdf.pdfa.Foundries").defaultInstance()
    flavours = jpype.JClass("org.verapdf.pdfa.flavours.PDFAFlavour")
    stream = jpype.JClass("java.io.FileInputStream")
    found: dict[str, dict[str, list[str]]] = {}
    for path in paths:
        for name in ("3a", "ua1"):
            flavour = flavours.fromString(name)
            result = foundry.createValidator(flavour, False).validate(foundry.createParser(stream(path), flavour))
            broken = {
                f"{a.getRuleId()}: {a.getMessage()}"
                for a in result.getTestAssertions()
                if str(a.getStatus()) == "failed"
            }
            assert bool(result.isCompliant()) == (not broken)
            found.setdefault(path, {})[name] = sorted(str(b) for b in broken)
    return found


if __name__ == "__main__":
    print(json.dumps(main(sys.argv[1], sys.argv[2:])))
