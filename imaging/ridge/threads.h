//go:build cgo && !nocv

#ifndef WEND_RIDGE_THREADS_H
#define WEND_RIDGE_THREADS_H
#ifdef __cplusplus
extern "C" {
#endif
void ridge_set_threads(int n);
int ridge_get_threads(void);
#ifdef __cplusplus
}
#endif
#endif
