//! Shots.
