"""What may be asked for, from what start, on what grid; and the cautions that an answer calls for."""
