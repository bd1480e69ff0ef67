"""The demonstration: an invented station, people and tubes, and readings that such a tube could give.

Everything here is invented; nothing is a maker's data or a limit for a real tube. `station.json` has the
registers (form: DEVELOPERS.md, "Registers"), `plant` the readings, `play` works a run through the engine as a
prudent person would, `build` fills a data folder.
"""
