"""Published methods as pure functions on numpy arrays: SI in, SI out, no files, no tables.

The ground floor: it imports no other room. Modules: `drag` (laws and terminal velocity), `inverse` (diameter,
sphericity or viscosity from a velocity), `rheology` (fluid models), `flow_curve` (their fit to viscometer readings),
`oilfield` (the field's numbers from dial readings), `liquids`, `walls` (round columns), `other_walls`, `crowding`,
`shape` and `form` (size and shape), `motion`, `added_mass`. `catalogue` holds all registries and makes the reference
page METHODS.md beside this file.
"""
