"""The published schema for reports of tests.

It is that of the Jenkins plug-in xunit, which the source distribution of pytest 9.2.0 carries
(testing/example_scripts/junit-10.xsd) and no installed package does; the file states its licence.
"""

from __future__ import annotations

from pathlib import Path

import xmlschema

SCHEMA_FILE = Path(__file__).parent / "junit-10.xsd"
SCHEMA = xmlschema.XMLSchema(SCHEMA_FILE)
