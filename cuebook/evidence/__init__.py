"""How cues are ranked: model, posterior, verdicts. Pure."""
