"""Tables and pictures of results; nothing is computed here beyond layout."""
