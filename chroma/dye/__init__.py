"""Dyes: what they absorb, how that was found, and what their solutions look like."""
