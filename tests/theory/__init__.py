"""Published solutions, as plain numpy functions, for comparison with the model; nothing here imports the model."""
