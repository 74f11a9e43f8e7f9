mod counting;
mod dimacs;
mod judging;
mod known_counts;
mod language;
mod making;
mod random_problem;
mod states;
