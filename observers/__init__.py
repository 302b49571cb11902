"""Ground floor: wavelength grids, illuminants, observers, and the weights that fold them into one matrix."""
