/* main.c: the executable. */
#include "command.h"

int main(int count, char **arguments) {
  return command_line(count - 1, (const char **)arguments + 1);
}
