//! The engine against closed forms, conserved quantities and measured orders.

mod events;
mod hard;
mod order;
mod problems;
mod shooting;
mod starts;
mod variations;
