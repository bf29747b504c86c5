"""What cards looked like when a person last read them."""
