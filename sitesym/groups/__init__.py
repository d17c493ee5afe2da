"""Point groups and their representations; nothing in here knows of crystals or files."""
