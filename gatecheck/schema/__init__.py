"""The contract: one reader and one JSON Schema for each format, both made from the typed models."""
