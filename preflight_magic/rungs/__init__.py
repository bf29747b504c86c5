"""One file a rung: examine a series, judge the evidence."""
