"""Weather from files: wind and air pressure on grids or of one station, and tracks of storms.

A *record* is a series of times with values of one or more quantities at each (`record.Record`): a window of a grid
(`gridded`), or one value for all places (`station`, `record.Uniform`). A record gives the values of one of its times, and the
weights that carry them to points; `in_time` joins both to values at the points of a mesh at any model time.

Every rank opens the files it needs by itself and reads its own window: no value passes between ranks.
"""
