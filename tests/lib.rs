//! Whole-program tests of Leastwise. The tests themselves are in the files beside this one.
