/* The yardstick: one point neuron, the pair rule, event by event, as one would first write it in C.
 *
 * Traces are lazy: each has the time of its last touch and decays by exp() when touched. A spike of
 * the cell touches every plastic input. The membrane is stepped by exponential Euler with
 * conductances. Inputs 0 .. n_plastic - 1 are excitatory and plastic, the others inhibitory.
 */
#include <math.h>
#include <stdlib.h>

typedef struct {
    double dt, tau_m, g_leak, threshold, reset;
    double tau_e, tau_i, e_exc, e_inh, g_exc, g_inh;
    double a_plus, a_minus, tau_plus, tau_minus, w_max;
    long n_steps, refractory, n_plastic;
} Setup;

long run(const Setup *s, long n_events, const int *step_of, const int *input_of, double *w,
         long *spike_step)
{
    double *x = calloc(s->n_plastic, sizeof *x), *touched = calloc(s->n_plastic, sizeof *touched);
    double y = 0, y_touched = 0, v = 0, ge = 0, gi = 0;
    const double keep_e = exp(-s->dt / s->tau_e), keep_i = exp(-s->dt / s->tau_i);
    const double capacitance = s->tau_m * s->g_leak;
    long e = 0, spikes = 0, free_at = 0;

    for (long step = 0; step < s->n_steps; step++) {
        const double t = step * s->dt;
        int fired = 0;
        if (step >= free_at && v >= s->threshold) {
            fired = 1;
            spike_step[spikes++] = step;
            v = s->reset;
            free_at = step + s->refractory;
        }
        if (fired)
            for (long i = 0; i < s->n_plastic; i++) {
                x[i] *= exp((touched[i] - t) / s->tau_plus);
                touched[i] = t;
                w[i] += s->a_plus * x[i];
                if (w[i] > s->w_max) w[i] = s->w_max;
            }
        for (; e < n_events && step_of[e] == step; e++) {
            const int i = input_of[e];
            if (i >= s->n_plastic) {
                gi += s->g_inh;
                continue;
            }
            ge += s->g_exc * w[i];
            w[i] -= s->a_minus * y * exp((y_touched - t) / s->tau_minus);
            if (w[i] < 0) w[i] = 0;
            x[i] = x[i] * exp((touched[i] - t) / s->tau_plus) + 1;
            touched[i] = t;
        }
        if (fired) {
            y = y * exp((y_touched - t) / s->tau_minus) + 1;
            y_touched = t;
        }
        const double total = s->g_leak + ge + gi;
        const double goal = (ge * s->e_exc + gi * s->e_inh) / total;
        v = goal + (v - goal) * exp(-s->dt * total / capacitance);
        if (step < free_at) v = s->reset;
        ge *= keep_e;
        gi *= keep_i;
    }
    free(x);
    free(touched);
    return spikes;
}
