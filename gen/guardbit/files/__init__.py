"""Safe paths, atomic writes, and the formats of images and arrays."""
