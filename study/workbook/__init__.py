"""Room 1: cells in, a plant out; result sheets grafted back."""
