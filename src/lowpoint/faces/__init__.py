"""The faces that users meet: thin layers that parse, call and show."""
