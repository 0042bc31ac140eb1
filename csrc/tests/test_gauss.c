/* Gauss and Legendre: n points integrate every power up to 2n - 1, and not the next. */
#include "gauss.h"

#include "expect.h"

/* int x^power over [-1, 1]; odd powers cancel by symmetry. */
static double power_ten(int power)
{
    double sum = 0.0;
    for (int p = 0; p < 5; p++) {
        sum += 2.0 * tw_gauss_ten_weight[p] * pow(tw_gauss_ten_point[p], power);
    }
    return sum;
}

static double power_five(int power)
{
    double sum = tw_gauss_five_weight[0] * pow(tw_gauss_five_point[0], power);
    for (int p = 1; p < 3; p++) {
        sum += 2.0 * tw_gauss_five_weight[p] * pow(tw_gauss_five_point[p], power);
    }
    return sum;
}

int main(void)
{
    for (int power = 0; power < 20; power += 2) {
        CHECK_NEAR(power_ten(power), 2.0 / (power + 1), 1e-15); /* a few roundings of numbers below 1 */
    }
    CHECK(fabs(power_ten(20) - 2.0 / 21.0) > 1e-7);
    for (int power = 0; power < 10; power += 2) {
        CHECK_NEAR(power_five(power), 2.0 / (power + 1), 1e-15);
    }
    CHECK(fabs(power_five(10) - 2.0 / 11.0) > 1e-4);
    return check_end("test_gauss");
}
