"""Questions put to a collector, one file each. Results only: nothing here prints."""
