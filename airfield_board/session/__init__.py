"""The recorder: one poll, start to finish, and the board state it answers with."""
