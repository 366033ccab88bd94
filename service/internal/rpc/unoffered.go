package rpc

import (
	"context"

	"google.golang.org/grpc"
	"google.golang.org/grpc/codes"
	"google.golang.org/grpc/status"

	pb "floatrail/api/floatrail/v1"
)

// notOfferedMethod answers the methods of the contract that this build does not carry out.
func notOfferedMethod(method, instead string) error {
	return status.Error(codes.Unimplemented, "this build does not offer "+method+"; "+instead)
}

// ReviewBoard is not offered.
func (h *Handlers) ReviewBoard(*pb.ReviewBoardRequest, grpc.ServerStreamingServer[pb.ReviewBoardResponse]) error {
	return notOfferedMethod("ReviewBoard", "send each stage to ReviewStage (POST /v1/reviews), or the file to the review command")
}

// CompareRevisions is not offered.
func (h *Handlers) CompareRevisions(context.Context, *pb.CompareRevisionsRequest) (*pb.CompareRevisionsResponse, error) {
	return nil, notOfferedMethod("CompareRevisions", "review both revisions with ReviewStage (POST /v1/reviews) and compare findings by identity and evidence")
}

// StudyAlternates is not offered.
func (h *Handlers) StudyAlternates(context.Context, *pb.StudyAlternatesRequest) (*pb.StudyAlternatesResponse, error) {
	return nil, notOfferedMethod("StudyAlternates", "review the stage with each alternate by ReviewStage (POST /v1/reviews)")
}

// ListDataGaps is not offered.
func (h *Handlers) ListDataGaps(context.Context, *pb.ListDataGapsRequest) (*pb.ListDataGapsResponse, error) {
	return nil, notOfferedMethod("ListDataGaps", "the findings of ReviewStage (POST /v1/reviews) name the missing fields")
}
