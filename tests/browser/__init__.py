"""Tests that drive the workbenches in a real browser, and the script that takes their screenshots."""
