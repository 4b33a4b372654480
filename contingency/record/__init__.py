"""Sign-offs, register of issued reports, seals: bytes in, proof out."""
