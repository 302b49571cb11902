"""Colour difference formulas: one file a formula, and `formulas.Formula`, which names one with its parameters."""
