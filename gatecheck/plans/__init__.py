"""Plans: what was promised before the data, how it was frozen, and what shows that it came first."""
