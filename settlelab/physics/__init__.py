"""Published methods as pure functions on numpy arrays: SI in, SI out, no files, no tables.

The ground floor: it imports no other room. Modules: `drag` (laws and terminal velocity), `rheology` (fluid models),
`flow_curve` (their fit to viscometer readings), `liquids`, `walls`, `shape`, `motion`.
"""
