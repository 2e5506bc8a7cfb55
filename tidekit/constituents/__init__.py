"""Names, Doodson numbers, compound tides, nodal modulation, and which constituents a record can resolve."""
