"""One run over a whole network."""
