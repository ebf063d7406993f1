"""Comparisons: a record against its own figures; facts, not judgements."""
