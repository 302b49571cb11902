"""The colour of liquids, from spectrum to decision."""
