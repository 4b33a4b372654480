"""The nouns of an estimate and how they are read from a folder of plain files."""
