"""The invented demonstration network."""
