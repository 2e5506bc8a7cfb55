"""Theory of boundary-trapped waves; numpy and scipy only."""
