"""Output: tables, coloured meshes, pictures, the window, the result folder."""
