"""The heat balance of a flat-plate solar collector, from the build sheet to the year of heat."""
