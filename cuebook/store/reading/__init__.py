"""The reading path: plain SQL, no table classes, light to load. It never writes."""
