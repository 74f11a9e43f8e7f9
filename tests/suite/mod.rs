mod command;
mod counting;
mod dimacs;
mod judging;
mod language;
mod making;
mod states;
mod walls;
