//! Banks and width along a channel, to a fraction of a pixel.
