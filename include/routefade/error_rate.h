/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file error_rate.h  Bit, symbol and packet error rates of a modulation, unfaded and averaged
 * over fading, with diversity; outage of combined branches; the SNR that meets a target.
 *
 * Every SNR here is Es/N0, symbol energy over noise density, in dB; Eb/N0 is lower by
 * 10 log10(bits a symbol). Bits are Gray mapped, decisions maximum likelihood, rates exact (no
 * union bound, no nearest neighbour). Domains: SNR within RFADE_SNR_LIMIT_DB, K in [0, 1e5], m
 * in [0.5, 1e4], shadowing up to 30 dB, 1 to 8 branches; anything else is RFADE_DOMAIN and
 * leaves NaN. Reentrant; no input or output.
 */
#ifndef ROUTEFADE_ERROR_RATE_H
#define ROUTEFADE_ERROR_RATE_H

#include <stddef.h>
#include <stdint.h>

#include "routefade/model.h"
#include "routefade/special.h"
#include "routefade/status.h"

#ifdef __cplusplus
extern "C" {
#endif

#define RFADE_SNR_LIMIT_DB 300.0
#define RFADE_PACKET_BITS_MAX 1e9
enum { RFADE_BRANCHES_MAX = 8 };

enum rfade_modulation_id {
    RFADE_BPSK,
    RFADE_QPSK,
    RFADE_8PSK,
    RFADE_16QAM,
    RFADE_64QAM,
    RFADE_256QAM,
    RFADE_DBPSK, /**< differentially detected over two symbols */
    RFADE_NCFSK2 /**< two orthogonal tones, detected without phase */
};
enum { RFADE_MODULATION_COUNT = 8 };

struct rfade_modulation; /* opaque: how its error rates follow from the SNR */

/** The table's entry; NULL if the id is unknown. Static storage. */
RFADE_API const struct rfade_modulation *rfade_modulation(enum rfade_modulation_id id);

/** The entry of that name ("16qam"); NULL if there is none. */
RFADE_API const struct rfade_modulation *rfade_modulation_by_name(const char *name);

/** "bpsk", "qpsk", "8psk", "16qam", "64qam", "256qam", "dbpsk", "ncfsk2". */
RFADE_API const char *rfade_modulation_name(const struct rfade_modulation *modulation);

/** log2 of the number of points. */
RFADE_API int rfade_modulation_bits(const struct rfade_modulation *modulation);

struct rfade_error_rate {
    double bit;     /**< [0, 1/2] */
    double symbol;  /**< [0, 1 - 1/points] */
    double log_bit; /**< ln of bit, finite where it underflows */
    double log_symbol;
};

/**
 * Error rates at one steady SNR (J. G. Proakis, Digital Communications; square QAM bits:
 * K. Cho and D. Yoon, IEEE Trans. Communications 50, 2002; 8-PSK bits: J. Lassing, E. G. Strom,
 * E. Agrell and T. Ottosson, IEEE Trans. Communications 51, 2003).
 * @param snr_db  Es/N0, dB; -infinity gives the limits, +infinity 0
 * Accuracy: relative 1e-12 above 1e-300, and in the logarithms.
 */
RFADE_API enum rfade_status rfade_error_rate_steady(const struct rfade_modulation *modulation,
                                                    double snr_db,
                                                    struct rfade_error_rate *rate);

enum rfade_combining {
    RFADE_MAXIMAL_RATIO, /**< coherent, before detection: the branches' SNRs add */
    RFADE_SELECTION      /**< the branch of the greatest SNR at every moment */
};

/**
 * What lies between the transmitter and the decision. The branches have equal means and fade
 * fast independently of each other; the lognormal local mean is common to them.
 */
struct rfade_link {
    const struct rfade_model *model; /**< rayleigh, rice, nakagami; NULL: unfaded */
    double parameter;                /**< K or m; ignored without one */
    double shadowing_db;             /**< standard deviation of the local mean, dB; 0: none */
    double mean_snr_db; /**< mean over everything, shadowing included, of ONE branch */
    int branches;       /**< 1 to RFADE_BRANCHES_MAX */
    enum rfade_combining combining;
};

/**
 * Error rates averaged over a link's fading: finite integrals of the moment generating function
 * for maximal-ratio combining (M. K. Simon and M.-S. Alouini, Digital Communication over Fading
 * Channels, 2nd ed. 2005, chapters 5, 8 and 9), the rate averaged over the density of the
 * combined SNR for selection. Several modulations at once share what they can.
 * @param modulations  [count], count >= 1
 * @param[out] rates   [count]
 * Accuracy: relative 1e-10 (mostly 1e-13) above 1e-300; the logarithms likewise, and where
 * there is no shadowing and no selection also far below.
 */
RFADE_API enum rfade_status rfade_error_rates(const struct rfade_link *link,
                                              const struct rfade_modulation *const *modulations,
                                              size_t count, struct rfade_error_rate *rates);

/** The unfaded rates at the same mean SNR: steady, with the branches' SNRs added up. */
RFADE_API enum rfade_status rfade_error_rate_unfaded(const struct rfade_link *link,
                                                     const struct rfade_modulation *modulation,
                                                     struct rfade_error_rate *rate);

/** A packet is in error if any of its bits is; there is no coding. */
struct rfade_packet_error {
    double independent; /**< every bit fades for itself, as if interleaved without limit */
    double block;       /**< the fading stands still for a packet */
};

/**
 * Packet error rates of `bits` uncoded bits: 1 - (1 - p)^bits with the mean bit error rate p,
 * and the mean over the fading of 1 - (1 - p(SNR))^bits. One bit: both are p; unfaded: both
 * agree.
 * @param bits  [1, RFADE_PACKET_BITS_MAX]; bits of one symbol are taken as independent
 * Accuracy: relative 1e-10 above 1e-300.
 */
RFADE_API enum rfade_status rfade_packet_error(const struct rfade_link *link,
                                               const struct rfade_modulation *modulation,
                                               double bits, struct rfade_packet_error *error);

/**
 * Outage of the combined SNR: the probability that it is below a threshold.
 * @param[out] tails  lower is the outage
 * Accuracy: relative 1e-10 in either tail above 1e-300.
 */
RFADE_API enum rfade_status rfade_link_outage(const struct rfade_link *link,
                                              double threshold_db, struct rfade_tails *tails);

/** Observed SNR: `weight` (of travel) uniformly in [low_db, high_db]; equal ends: all there. */
struct rfade_snr_bin {
    double low_db;
    double high_db;
    double weight; /**< >= 0 */
};

/**
 * Mean error rates over an observed distribution of SNR: no model of fading comes in.
 * @param bins    [bin_count], total weight > 0; ends finite
 * @param[out] rates  [count], as for rfade_error_rates()
 * @return RFADE_OK | RFADE_DOMAIN | RFADE_NO_DATA (no weight)
 * Accuracy: relative 1e-12 above 1e-60.
 */
RFADE_API enum rfade_status
rfade_error_rates_observed(const struct rfade_snr_bin *bins, size_t bin_count,
                           const struct rfade_modulation *const *modulations, size_t count,
                           struct rfade_error_rate *rates);

/** Steady error rates tabulated against dB, for the means of many distributions; opaque. */
struct rfade_rate_table;

/**
 * @param modulations  [count], count >= 1
 * @param width_db     of the bins that most distributions consist of, [0, 1]: their means are
 *                     what is tabulated
 * @return RFADE_OK | RFADE_DOMAIN | RFADE_NO_MEMORY (*table is NULL)
 */
RFADE_API enum rfade_status
rfade_rate_table_create(const struct rfade_modulation *const *modulations, size_t count,
                        double width_db, struct rfade_rate_table **table);
RFADE_API void rfade_rate_table_destroy(struct rfade_rate_table *table); /* NULL is harmless */

/**
 * As rfade_error_rates_observed(), from a table, many times as fast where bins have its width
 * (others are integrated for themselves). May be called from several threads at once.
 * @param[out] rates  [count of the table's modulations]
 * Accuracy: relative 1e-10 above 1e-12, 1e-9 above 1e-60.
 */
RFADE_API enum rfade_status rfade_rate_table_mean(const struct rfade_rate_table *table,
                                                  const struct rfade_snr_bin *bins,
                                                  size_t bin_count,
                                                  struct rfade_error_rate *rates);

enum rfade_target_kind {
    RFADE_TARGET_OUTAGE, /**< of threshold_db */
    RFADE_TARGET_BIT,
    RFADE_TARGET_SYMBOL,
    RFADE_TARGET_PACKET_INDEPENDENT,
    RFADE_TARGET_PACKET_BLOCK
};

struct rfade_target {
    enum rfade_target_kind kind;
    double value;                              /**< the probability to be met */
    double threshold_db;                       /**< of an outage */
    const struct rfade_modulation *modulation; /**< of an error rate */
    double packet_bits;                        /**< of a packet */
};

/**
 * Mean SNR of one branch at which a link just meets a target; link->mean_snr_db is ignored.
 * Checked forward: the probability there is the target to 1e-9 relative.
 * @return RFADE_OK | RFADE_DOMAIN (also: no SNR within RFADE_SNR_LIMIT_DB meets the target, or
 *         every one does) | RFADE_NO_CONVERGENCE
 */
RFADE_API enum rfade_status rfade_required_snr(const struct rfade_link *link,
                                               const struct rfade_target *target,
                                               double *mean_snr_db);

/**
 * Fade margin or fading penalty at a target, dB: required SNR of the link less that of one
 * unfaded branch.
 */
RFADE_API enum rfade_status rfade_fading_penalty(const struct rfade_link *link,
                                                 const struct rfade_target *target,
                                                 double *penalty_db);

/**
 * Diversity order: the slope far out, decades of error rate or outage for each decade of SNR:
 * branches (rayleigh, rice) or branches times m (nakagami); infinity unfaded.
 */
RFADE_API enum rfade_status rfade_diversity_order(const struct rfade_link *link, double *order);

#ifdef __cplusplus
}
#endif
#endif
