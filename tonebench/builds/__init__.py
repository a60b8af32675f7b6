"""Chain and target to the text of a programming language or data format; no input or output."""
