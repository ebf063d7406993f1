"""The nouns of gatecheck: records, numbers as reported, places, findings, verdicts."""
