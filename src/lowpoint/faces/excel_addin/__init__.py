"""The Excel add-in: its generated VBA, its building and installing, and the functions that xlwings serves to it."""
