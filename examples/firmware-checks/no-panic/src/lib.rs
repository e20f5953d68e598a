//! Empty.
#![no_std]
