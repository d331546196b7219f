"""The four pages, in the order of the work. Each takes the desk: `XPage(desk)`."""
