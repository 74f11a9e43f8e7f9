mod counting;
mod dimacs;
mod judging;
mod language;
mod making;
mod random_problem;
mod states;
