"""Cues: wording, claims, fit to a person, look-up, sets of cues. Pure."""
