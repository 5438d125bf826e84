"""The invented demonstration: three settings, planted truths, simulated recordings."""
