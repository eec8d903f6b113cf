"""Fit: what the goods take, how far each piece goes, and pieces shaped to stay within it."""
