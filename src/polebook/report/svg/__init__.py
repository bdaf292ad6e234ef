"""Drawings as SVG, from the documents of `record.review`. Black, greys, hatches and words on white: nothing is told by
colour, and the same figures give the same bytes."""
