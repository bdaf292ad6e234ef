"""The file as characters: read and saved, located and edited. Knows nothing of amplifiers."""
