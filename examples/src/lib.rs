//! Holds nothing: the examples stand in the files beside this one.
