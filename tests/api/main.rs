//! The service over HTTP: a server on a free port, a database of its own, a simulated plant.

mod cleanings;
mod exports;
mod health;
mod openapi;
mod permeability;
mod problems;
mod readings;
mod receipts;
mod recommendations;
mod site;
mod support;
mod trains;
mod work_orders;
