"""How a routine is called, compared with the contract, and refuted by a frame."""
