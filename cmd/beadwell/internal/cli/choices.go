package cli

import (
	"strconv"

	"github.com/spf13/cobra"

	"beadwell/calib"
)

// choices are what the command line asks of a calibration beside the settings.
type choices struct {
	adopt string
	use   string
	draws int
	seed  uint64
}

// Limits of the number of Monte Carlo draws: with fewer than 1000 the ends of a 95 % interval rest on 25 of
// them; more than ten million fill the memory.
const (
	leastDraws = 1000
	mostDraws  = 10_000_000
)

// add adds the flags of the choices to a command.
func (c *choices) add(cmd *cobra.Command) {
	flags := cmd.Flags()
	flags.StringVar(&c.adopt, "adopt", "", "adopt this route alone, also when routes disagree: `drag|amplitude|free-bead|driven|flow`")
	flags.StringVar(&c.use, "use", "", "calibrate only the longest part without what is bad, such as an escape: `good`")
	flags.IntVar(&c.draws, "monte-carlo", 0, "propagate distributions with this `number` of draws, and compare with the budget")
	flags.Uint64Var(&c.seed, "seed", 1, "with --monte-carlo: whole `number` that selects the draws")
	completeWords(cmd, "use", calib.UseGood)
	completeWords(cmd, "adopt", calib.AdoptWords...)
}

// check refuses words that are not known, and a seed without draws.
func (c choices) check(cmd *cobra.Command) error {
	if c.adopt != "" {
		if err := oneOf("adopt", c.adopt, calib.AdoptWords...); err != nil {
			return err
		}
	}
	if c.use != "" {
		if err := oneOf("use", c.use, calib.UseGood); err != nil {
			return err
		}
	}
	if c.draws != 0 && (c.draws < leastDraws || c.draws > mostDraws) {
		return usageError("100000 draws give the ends of an interval to 1 % of the standard uncertainty", "--monte-carlo %d is not between %d and %d", c.draws, leastDraws, mostDraws)
	}
	if cmd.Flags().Changed("seed") && c.draws == 0 {
		return usageError("leave it out, or add --monte-carlo 100000", "--seed has no effect without --monte-carlo")
	}
	return nil
}

// options are the choices as the calibration takes them.
func (c choices) options() calib.Options {
	options := calib.Options{Adopt: c.adopt, Use: c.use}
	if c.draws > 0 {
		options.MonteCarlo = calib.MonteCarloOptions{Draws: c.draws, Seed: c.seed}
	}
	return options
}

// command lists the flags that make the choices.
func (c choices) command() (list []string) {
	for _, flag := range [][2]string{{"--adopt", c.adopt}, {"--use", c.use}} {
		if flag[1] != "" {
			list = append(list, flag[0], flag[1])
		}
	}
	if c.draws > 0 {
		list = append(list, "--monte-carlo", strconv.Itoa(c.draws), "--seed", strconv.FormatUint(c.seed, 10))
	}
	return list
}
