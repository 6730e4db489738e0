"""The scene: mesh files read into named parts, in one frame, with what may be wrong with them."""
