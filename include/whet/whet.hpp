#pragma once
/// The core of whet in one include: needs Eigen and Boost.Math alone.

#include <whet/assembly/expected_information.hpp>
#include <whet/covariances/dense_covariance.hpp>
#include <whet/covariances/diagonal_covariance.hpp>
#include <whet/derivatives/confirm.hpp>
#include <whet/derivatives/derivatives.hpp>
#include <whet/derivatives/differentiate.hpp>
#include <whet/forecasts/forecast.hpp>
#include <whet/information/gaussian_prior.hpp>
#include <whet/information/information.hpp>
#include <whet/information/root_information.hpp>
#include <whet/likelihoods/gaussian_likelihood.hpp>
#include <whet/likelihoods/poisson_likelihood.hpp>
#include <whet/observables/concatenate.hpp>
#include <whet/observables/exact.hpp>
#include <whet/observables/labelled.hpp>
#include <whet/observables/tabulate.hpp>
#include <whet/parameters/parameters.hpp>
#include <whet/parameters/point.hpp>
#include <whet/report/table.hpp>
