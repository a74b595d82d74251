//go:build cgo && !nocv

#include "threads.h"

#include <opencv2/core.hpp>

void ridge_set_threads(int n) { cv::setNumThreads(n); }
int ridge_get_threads(void) { return cv::getNumThreads(); }
