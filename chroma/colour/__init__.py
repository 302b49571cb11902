"""Colour spaces and what follows from tristimulus values alone."""
