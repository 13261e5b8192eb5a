"""Read and check the register and the programme file."""
