"""What the command returns to the shell."""

DONE, ANSWER_IS_NO, WRONG_INPUT, OWN_FAULT = 0, 1, 2, 3
STOPPED_BY_USER = 130
