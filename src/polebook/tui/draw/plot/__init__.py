"""Plots in cells: `axis` where a value lies and how it is told, `raster` curves as dots, `chart` what a plot shows,
`paint` its lines, `sight` which part of an axis is in sight. Nothing in here knows what is plotted."""
