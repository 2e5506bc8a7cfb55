"""Coast geometry, propagation along and across a coast, verdicts, faults of single gauges."""
