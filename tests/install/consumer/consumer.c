/* The C interface, used from C. */
#include <stdio.h>

#include "stanchion/stanchion.h"

static int complain(const stanchion_answer* answer) {
  printf("%s: %s\n", stanchion_place(answer), stanchion_message(answer));
  return 1;
}

int main(int argc, char** argv) {
  stanchion_request* request = stanchion_request_new();
  stanchion_answer* answer;
  int32_t least = 0, most = 0;
  if (argc != 3 || request == NULL) return 2;

  stanchion_set_stiffness(request, argv[1]);
  answer = stanchion_check(request);
  if (stanchion_status(answer) != STANCHION_OK) return complain(answer);
  printf("%d negative, %s\n", (int)stanchion_negative(answer),
         stanchion_level(answer) == STANCHION_LEVEL_PROVED ? "proved" : "not proved");
  stanchion_answer_free(answer);

  stanchion_set_geometric(request, argv[2]);
  stanchion_add_shift(request, 2.0);
  answer = stanchion_count(request);
  if (stanchion_status(answer) != STANCHION_OK) return complain(answer);
  if (!stanchion_count_at(answer, 0, NULL, &least, &most, NULL)) return 1;
  printf("%d to %d below 2\n", (int)least, (int)most);
  stanchion_answer_free(answer);

  stanchion_set_stiffness(request, "no-such-file.mtx");
  answer = stanchion_count(request);
  if (stanchion_status(answer) != STANCHION_BAD_USAGE) return 1;
  complain(answer);
  stanchion_answer_free(answer);
  stanchion_request_free(request);
  return 0;
}
