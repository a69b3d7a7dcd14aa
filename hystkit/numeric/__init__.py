"""How much: the laws evaluated, arrays in and arrays out."""
