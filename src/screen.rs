//! (&Picture, &Desk) to cells. Reads the Picture, computes nothing.
