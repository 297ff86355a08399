"""The rules a board is judged by, one module each, and the engine that runs them."""
