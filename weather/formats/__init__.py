"""Readers of weather files, one a format; each leaves SI columns on the file's own rows and judges nothing."""
