"""A small harbour office: manifests, berths, tides, soundings, cranes and the register of calls."""
