"""Controlled lists: features, regions, tasks, tempo, ages, backgrounds, lay words."""
