"""fieldkit: field checklist and commissioning recorder for high-power UHF tube amplifiers.

The pipeline, one noun a stage, is drawn in DEVELOPERS.md. Nothing is imported here on purpose: the
pure core must be importable without Flask, SQLAlchemy, WeasyPrint or pyHanko.
"""

__version__ = "0.1.0"
