"""Finding amounts: recipes that meet a target, and what the search for them is made of."""
