"""Writers of messy files with a known truth."""
