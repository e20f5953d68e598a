//! Holds nothing: the tests stand in the files beside this one.
