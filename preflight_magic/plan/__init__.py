"""The plan of a series: what it does to the data, how it is undone, and the code that does both."""
