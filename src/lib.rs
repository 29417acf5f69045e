//! skeleton
#![no_std]
