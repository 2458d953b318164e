#include <formsieve/pipeline.hpp>
