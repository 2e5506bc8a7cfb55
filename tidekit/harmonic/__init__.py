"""The least-squares harmonic analyser."""
