"""Electrical studies of a ship's power plant from one Excel workbook."""
