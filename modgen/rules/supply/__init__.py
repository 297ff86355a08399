"""Protection, decoupling and range of the supply."""
