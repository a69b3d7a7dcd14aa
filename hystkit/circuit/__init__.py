"""What is wired: elements, stage, device, supply, signal, preferred numbers, design, record."""
