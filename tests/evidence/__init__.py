"""Long measurements behind the figures in docs; run by hand, checked in part by the suite."""
