"""Concentration from a photo of cuvettes: a camera is one more observer of lamp × solution."""
