"""The Calc add-in: its generated parts, its building and installing, and what runs in the office (``inside``)."""
