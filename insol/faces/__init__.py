"""The faces: surfaces cut to the spacing, grids on the ground, named points."""
