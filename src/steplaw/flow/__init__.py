"""The shape of a code object: instructions, blocks, edges, loops."""
