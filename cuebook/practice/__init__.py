"""What happened in practice: sessions, blocks, uses, and the changes derived from them. Pure."""
