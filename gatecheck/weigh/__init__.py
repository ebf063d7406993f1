"""The mathematics of evidence: arrays in, arrays out, in logarithms; no record, no policy, no words."""

from gatecheck.weigh.chi2 import log_lr_chi2, observed_chi2
from gatecheck.weigh.f import log_lr_f, observed_f
from gatecheck.weigh.mixed import Statistic, at_noncentrality, log_p, observed_effect, value_from_log_p
from gatecheck.weigh.quantiles import (
    chi2_from_log_p,
    f_from_log_p,
    t_from_log_p,
    t_quantile_two_sided,
    z_from_log_p,
)
from gatecheck.weigh.risk import (
    false_positive_risk,
    log_false_positive_risk,
    log_lr_bound,
    log_lr_needed,
    log_p_for_bound,
    prior_needed,
)
from gatecheck.weigh.sample_size import least_that_serves, n_to_stand
from gatecheck.weigh.t import log_lr_t, observed_t, r_from_t, t_from_r
from gatecheck.weigh.tails import log_p_chi2, log_p_f, log_p_t, log_p_z
from gatecheck.weigh.z import log_lr_z, observed_z

__all__ = [
    "Statistic",
    "at_noncentrality",
    "chi2_from_log_p",
    "f_from_log_p",
    "false_positive_risk",
    "least_that_serves",
    "log_false_positive_risk",
    "log_lr_bound",
    "log_lr_chi2",
    "log_lr_f",
    "log_lr_needed",
    "log_lr_t",
    "log_lr_z",
    "log_p",
    "log_p_chi2",
    "log_p_f",
    "log_p_for_bound",
    "log_p_t",
    "log_p_z",
    "n_to_stand",
    "observed_chi2",
    "observed_effect",
    "observed_f",
    "observed_t",
    "observed_z",
    "prior_needed",
    "r_from_t",
    "t_from_log_p",
    "t_from_r",
    "t_quantile_two_sided",
    "value_from_log_p",
    "z_from_log_p",
]
