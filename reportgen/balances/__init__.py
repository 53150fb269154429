"""Mass, energy and entropy relations of each kind of equipment; the network and its solution."""
