"""Time scales, mean longitudes and the tide-generating potential's line table."""
