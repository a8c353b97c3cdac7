package track

import "math/big"

// makeWideTens returns 10^e for e from -wideRange to wideRange, each as the
// upper 128 bits of its binary expansion (rounded down), from exact integers.
func makeWideTens() *[2*wideRange + 1]wideTen {
	table := new([2*wideRange + 1]wideTen)
	ten := big.NewInt(10)
	mask := new(big.Int).SetUint64(^uint64(0))
	for e := -wideRange; e <= wideRange; e++ {
		power := new(big.Int).Exp(ten, big.NewInt(int64(max(e, -e))), nil)
		if e < 0 {
			// 10^e = 2^k / 10^-e with k so large that at least 128 bits remain.
			one := new(big.Int).Lsh(big.NewInt(1), uint(power.BitLen()+130))
			power = one.Quo(one, power)
		}
		if extra := power.BitLen() - 128; extra >= 0 {
			power.Rsh(power, uint(extra))
		} else {
			power.Lsh(power, uint(-extra))
		}
		low := new(big.Int).And(power, mask).Uint64()
		table[e+wideRange] = wideTen{high: new(big.Int).Rsh(power, 64).Uint64(), low: low}
	}
	return table
}
