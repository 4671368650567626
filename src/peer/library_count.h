/* What a module that speaks for another library offers: the number of negative pivots of a symmetric matrix.
 * Plain C, so that the module may be built by another compiler and loaded at run time. */
#ifndef STANCHION_PEER_LIBRARY_COUNT_H
#define STANCHION_PEER_LIBRARY_COUNT_H

#ifdef __cplusplus
extern "C" {
#endif

#define STANCHION_PEER_INTERFACE 1

/* Lower triangle, every entry once; rows and columns count from 1. Nothing is owned, nothing is changed. */
typedef struct {
  int rows;
  long long entries;
  int* row;
  int* column;
  double* value;
  int most_megabytes; /* that the library may allocate; 0: as it likes */
} StanchionPeerMatrix;

typedef struct {
  int negative; /* pivots of the factorization with pivoting; valid when error is 0 */
  int error;    /* the library's own, 0 for none */
  char message[128];
} StanchionPeerAnswer;

typedef struct {
  int interface_version; /* STANCHION_PEER_INTERFACE */
  const char* name;
  const char* version; /* of the library */
  /* Never throws, prints nothing. Not thread safe. */
  void (*count_negative)(const StanchionPeerMatrix* matrix, StanchionPeerAnswer* answer);
} StanchionPeer;

/* The one symbol of a module; the pointee lives as long as the module. */
const StanchionPeer* stanchion_peer(void);

#ifdef __cplusplus
}
#endif

#endif
