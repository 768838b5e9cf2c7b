"""The astronomical tide: mean longitudes, constituents, nodal factors, equilibrium tide, prediction from harmonic constants.

One convention throughout. A constituent has the argument V = n . (tau, s, h, p, N', p') + offset at Greenwich, with tau
counted from lower transit (midnight), and its modulation f, u. Its level at east longitude lambda is

    f A cos(V + u + species lambda)        equilibrium tide, A its amplitude at the place
    f H cos(V + u - g)                     harmonic constants H and g (phase lag on Greenwich, times UTC)
"""
