package optimize

import "context"

type GaussianDesign struct{}

func (GaussianDesign) Name() string                                        { return "Gaussian design" }
func (g GaussianDesign) check(p Problem) error                             { return ErrUnsupported }
func (GaussianDesign) search(ctx context.Context, p Problem, r *run) error { return nil }
func (GaussianDesign) finish(p Problem, r *run) (Result, error)            { return Result{}, nil }
