//! What is seen and touched: state, update, view, terminal.
