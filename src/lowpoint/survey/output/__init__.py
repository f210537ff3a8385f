"""The sheets of the output workbook."""
