"""Heights at times, turning points (high and low waters) and tide tables."""
